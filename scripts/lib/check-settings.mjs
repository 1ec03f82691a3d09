// Checks the settings of its environment with the application's own rules, and ends. A process of its own: what reads
// TypeScript stays with a thread and the maps of all sources, which a server would carry for as long as it runs.
import { tsImport } from "tsx/esm/api";

const { isLoopback, readEnv } = await tsImport("../../app/env.server.ts", import.meta.url);
const origin = process.env.APP_ORIGIN || "http://127.0.0.1";
const loopback = process.env.NODE_ENV !== "production" || isLoopback(origin);
// What `npm start` fills in itself afterwards.
const filled = {
  DATABASE_URL: "mysql://not-yet@127.0.0.1/lowlying",
  ...(loopback ? { SESSION_SECRET: "made at the start".repeat(4), DEMO_PASSWORD: "made at the start" } : {}),
};
const given = Object.entries(process.env).filter(([, value]) => value !== "");
try {
  readEnv({ ...filled, ...Object.fromEntries(given) });
  console.log(JSON.stringify({ loopback }));
} catch (error) {
  if (error.name !== "EnvError") throw error;
  console.log(JSON.stringify({ fault: error.message }));
}
