import type { Server } from "node:http";

/** Types for the tests; the shapes are the ones that app/application.server.ts gives. */
export function makeServer<Context>(options: {
  application: {
    bodyLimit(pathname: string): number | null;
    bodyTooLarge(limit: number): Error;
    clientAddress(peer: string, forwarded: string | undefined, trusted: number): string;
    makeContext(address: string): Context;
    plainHeaders(): Record<string, string>;
    env(): {
      TRUST_PROXY: number;
      SMALL_BODY_SECONDS: number;
      SLOW_UPLOAD_SECONDS: number;
      SLOW_UPLOAD_BYTES: number;
    };
    log: { error(fields: object, message: string): void };
  };
  handle(request: Request, context: Context): Promise<Response>;
  staticFolder: string | null;
  every?(ms: number, run: () => void): () => void;
}): {
  server: Server;
  openRequests(): number;
  listen(port: number, host: string): Promise<void>;
  close(patienceMs: number): Promise<void>;
};
