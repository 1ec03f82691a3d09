import { z } from "zod";

// zod tries at its first object schema whether it may compile code; the content security policy refuses that and
// reports it. Imported by root.tsx before anything else, because the root module is the first one a page runs.
z.config({ jitless: true });
