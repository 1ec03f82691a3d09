import { PassThrough } from "node:stream";
import { createReadableStreamFromReadable } from "@react-router/node";
import { isbot } from "isbot";
import { renderToPipeableStream } from "react-dom/server";
import {
  type EntryContext,
  type HandleErrorFunction,
  isRouteErrorResponse,
  type RouterContextProvider,
  ServerRouter,
} from "react-router";
import { nonceContext, requestIdContext } from "./context.ts";
import { log } from "./services/log.server.ts";

// What the start script needs of the application comes with the server build, so that both share one of everything.
export { application } from "./application.server.ts";

export const streamTimeout = 5_000;

/** Failures that no loader turned into words: all of them, once, with the id that the person is shown. */
export const handleError: HandleErrorFunction = (error, { request, context }) => {
  if (request.signal.aborted) return;
  // Thrown data and wrong methods are answers, not failures.
  if (isRouteErrorResponse(error) && error.status < 500) return;
  const cause = isRouteErrorResponse(error) ? (error as { error?: unknown }).error : error;
  log.error({ err: cause ?? error, requestId: context.get(requestIdContext) }, "unexpected failure");
};

/** Renders a document as a stream; every script and style element of it carries the response's nonce. */
export default function handleRequest(
  request: Request,
  status: number,
  headers: Headers,
  routerContext: EntryContext,
  context: RouterContextProvider,
): Promise<Response> | Response {
  headers.set("content-type", "text/html; charset=utf-8");
  if (request.method === "HEAD") return new Response(null, { status, headers });
  const nonce = context.get(nonceContext);
  // Programs that do not run scripts get the whole page at once.
  const whole = isbot(request.headers.get("user-agent") ?? "") || routerContext.isSpaMode;
  return new Promise((resolve, reject) => {
    let answered = false;
    const answer = () => {
      answered = true;
      const body = new PassThrough();
      body.once("close", () => clearTimeout(timer));
      pipe(body);
      resolve(new Response(createReadableStreamFromReadable(body), { status, headers }));
    };
    const { pipe, abort } = renderToPipeableStream(
      <ServerRouter context={routerContext} url={request.url} nonce={nonce} />,
      {
        nonce,
        [whole ? "onAllReady" : "onShellReady"]: answer,
        onShellError: reject,
        onError: (error) => {
          // Before the shell the router hears of it and renders the error page.
          if (answered)
            log.error({ err: error, requestId: context.get(requestIdContext) }, "failure while rendering");
        },
      },
    );
    const timer = setTimeout(abort, streamTimeout + 1_000);
  });
}
