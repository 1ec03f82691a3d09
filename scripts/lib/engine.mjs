// Settings of the engine for processes that compute; imported before anything that runs hot.
import { setFlagsFromString } from "node:v8";

/**
 * Bytes of code that a function runs before the engine compiles it to its fastest form. The engine's own 67,584 pay in
 * pages that live for hours; taking in and sifting one upload takes about a second, of which a third went into
 * compiling, much of it several times, since branches that a function met late threw its code away.
 */
setFlagsFromString("--interrupt-budget=400000");
