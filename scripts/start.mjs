// `npm start`: from a fresh clone to a signed-in page. Installs, starts, migrates, builds, seeds what is missing, then
// serves in this process until it is told to stop.
import "./lib/engine.mjs";
import { start } from "./lib/start-server.mjs";

await start();
