import { type LevelTask, runLevelTask } from "./levels-protocol";

/** Runs one task after the other; who wants to stop one ends the thread. */
self.addEventListener("message", ({ data }: MessageEvent<LevelTask>) => {
  self.postMessage(runLevelTask(data.name, data.input as never));
});
