import { existsSync, readdirSync, readFileSync } from "node:fs";
import path from "node:path";
import { describe, expect, it } from "vitest";
import routeTable from "../app/routes.ts";

const ROOT = path.resolve(import.meta.dirname, "..");
const APP = path.join(ROOT, "app");

interface Import {
  from: string;
  to: string;
  typeOnly: boolean;
}

const sources = readdirSync(APP, { recursive: true, encoding: "utf8" })
  .filter((file) => /\.tsx?$/.test(file) && !/\.test\.tsx?$/.test(file))
  .map((file) => file.split(path.sep).join("/"))
  .sort();

/** Static and dynamic imports and re-exports, comments left out. */
const IMPORT =
  /(?:^|\n|;)\s*(import|export)\s+(type\s)?([^;]*?from\s*)?["']([^"'\n]+)["']|(?<!typeof )\bimport\(\s*["']([^"']+)["']\s*\)/g;

function withoutComments(text: string): string {
  return text.replace(/\/\*[\s\S]*?\*\//g, "").replace(/(^|\s)\/\/[^\n]*/g, "$1");
}

/** A path below app/ for what is ours, the bare name for a package. */
function resolve(from: string, to: string): string {
  const raw = to.startsWith("~/")
    ? to.slice(2)
    : to.startsWith(".")
      ? path.posix.join(path.posix.dirname(from), to)
      : null;
  if (raw === null) return to;
  // A file taken in as text is no module; its own name counts.
  if (raw.endsWith("?raw")) return `app/${raw.slice(0, -4)}`;
  const found = [raw, `${raw}.ts`, `${raw}.tsx`, `${raw}/index.ts`].find((name) => sources.includes(name));
  return `app/${found ?? raw}`;
}

function importsOf(file: string): Import[] {
  const text = withoutComments(readFileSync(path.join(APP, file), "utf8"));
  return [...text.matchAll(IMPORT)].flatMap((match) => {
    const to = match[4] ?? match[5];
    if (to === undefined || to.includes("+types/")) return [];
    const names = match[3] ?? "";
    // `import { type A, type B } from` brings in nothing either.
    const listed = /^\{([^}]*)\}\s*from/.exec(names.trim())?.[1];
    const onlyTypes =
      listed?.trim() !== "" &&
      listed
        ?.split(",")
        .filter((name) => name.trim() !== "")
        .every((name) => name.trim().startsWith("type ")) === true;
    return [{ from: file, to: resolve(file, to), typeOnly: match[2] !== undefined || onlyTypes }];
  });
}

const imports = sources.flatMap(importsOf);
const folderOf = (file: string) => (file.includes("/") ? (file.split("/", 1)[0] ?? "") : "");

/** Values that files of a folder import; types cost nothing at run time and bind nothing. */
function valuesFrom(folder: string): Import[] {
  return imports.filter((one) => folderOf(one.from) === folder && !one.typeOnly);
}

const show = ({ from, to }: Import) => `${from} imports ${to}`;
const isOurs = (to: string) => to.startsWith("app/");
const isNode = (to: string) => to.startsWith("node:");

/** What a folder may import, as the table in house style, section 2, has it. */
const MAY: Record<string, (one: Import) => boolean> = {
  // The readers of files may take streams; everything else of the core is plain computation.
  lib: ({ to }) => to.startsWith("app/lib/") || to === "zod" || to === "zod-openapi" || to.startsWith("zod/"),
  workers: ({ to }) =>
    to.startsWith("app/lib/") || to.startsWith("app/workers/") || to === "node:worker_threads",
  db: ({ to }) =>
    to.startsWith("app/lib/") ||
    to.startsWith("app/db/") ||
    to === "app/env.server.ts" ||
    isNode(to) ||
    /^(drizzle-orm|mysql2|zod)(\/|$)/.test(to),
  services: ({ from, to }) =>
    isOurs(to)
      ? /^app\/(services|db|lib)\//.test(to) || to === "app/workers/protocol.ts" || to === "app/env.server.ts"
      : from === "services/http.server.ts" || !/^(react|react-dom|react-router|@react-router)(\/|$)/.test(to),
  middleware: ({ to }) =>
    /^app\/(services|lib|middleware)\//.test(to) ||
    to === "app/context.ts" ||
    to === "app/env.server.ts" ||
    to === "react-router" ||
    isNode(to),
  routes: ({ to }) => !/^app\/(db|workers)\//.test(to) && !/^(drizzle-orm|mysql2)/.test(to),
  components: ({ to }) =>
    isOurs(to)
      ? /^app\/(lib|components|hooks)\//.test(to) && !to.includes(".server.")
      : !isNode(to) && !/\.server$/.test(to),
  hooks: ({ to }) =>
    isOurs(to)
      ? /^app\/(lib|components|hooks)\//.test(to) && !to.includes(".server.")
      : !isNode(to) && !/\.server$/.test(to),
};

describe("imports point one way", () => {
  it.each(Object.keys(MAY))("from %s", (folder) => {
    const may = MAY[folder];
    const breaches = valuesFrom(folder)
      .filter((one) => may?.(one) !== true)
      .map(show);
    expect(breaches).toEqual([]);
  });

  it("knows every folder of app", () => {
    const folders = new Set(sources.map(folderOf).filter(Boolean));
    expect([...folders].filter((folder) => !(folder in MAY))).toEqual([]);
  });

  it("finds the file behind every import of ours", () => {
    const lost = imports.filter(
      ({ to }) => isOurs(to) && !/\.css$/.test(to) && !existsSync(path.join(ROOT, to)),
    );
    expect(lost.map(show)).toEqual([]);
  });

  it("runs in no circle", () => {
    const graph = new Map<string, string[]>();
    for (const { from, to, typeOnly } of imports) {
      if (typeOnly || !isOurs(to)) continue;
      const key = `app/${from}`;
      graph.set(key, [...(graph.get(key) ?? []), to]);
    }
    const done = new Set<string>();
    const circles: string[] = [];
    const walk = (file: string, trail: string[]) => {
      if (trail.includes(file)) {
        circles.push([...trail.slice(trail.indexOf(file)), file].join(" > "));
        return;
      }
      if (done.has(file)) return;
      for (const next of graph.get(file) ?? []) walk(next, [...trail, file]);
      done.add(file);
    };
    for (const file of graph.keys()) walk(file, []);
    expect(circles).toEqual([]);
  });
});

describe("the core is pure", () => {
  /** Clock, randomness, environment and network reach lib as arguments. */
  const IMPURE = /\bDate\.now\(|\bnew Date\(\)|\bMath\.random\(|\bprocess\.|\bperformance\.now\(|\bfetch\(/;

  it("asks nobody for time, chance, settings or the network", () => {
    const impure = sources.filter(
      (file) =>
        file.startsWith("lib/") && IMPURE.test(withoutComments(readFileSync(path.join(APP, file), "utf8"))),
    );
    expect(impure).toEqual([]);
  });

  it("is read by browsers too, but for its readers of files", () => {
    const leaves = imports.filter(
      ({ from, to, typeOnly }) =>
        !typeOnly && to.startsWith("app/lib/") && to.includes(".server.") && !from.includes(".server."),
    );
    const outside = leaves.filter(({ from }) => !/^(services|workers)\//.test(from));
    expect(outside.map(show)).toEqual([]);
  });
});

describe("server code stays on the server", () => {
  it("shows 3dmol to one file only", () => {
    const users = new Set(
      imports.filter(({ to, typeOnly }) => to === "3dmol" && !typeOnly).map(({ from }) => from),
    );
    expect([...users].filter((file) => !/^components\/viewer\/[^/]+\.client\.tsx?$/.test(file))).toEqual([]);
  });

  it("marks no route module as a server file", () => {
    const marked = (entry: RouteEntry): string[] => [entry.file, ...(entry.children ?? []).flatMap(marked)];
    const files = table.flatMap(marked);
    expect(files.filter((file) => /\.(server|client)\./.test(file))).toEqual([]);
  });
});

interface RouteEntry {
  file: string;
  children?: RouteEntry[];
}

const table = routeTable as unknown as RouteEntry[];

describe("the table of routes", () => {
  const listed = (entry: RouteEntry): string[] => [entry.file, ...(entry.children ?? []).flatMap(listed)];
  const files = table.flatMap(listed);

  it("names only files that are there", () => {
    expect(files.filter((file) => !existsSync(path.join(APP, file)))).toEqual([]);
  });

  it("names every route file, so that none lies about unused", () => {
    // Helpers beside routes carry .server in their name or are no route by what they export.
    const loose = sources.filter(
      (file) => file.startsWith("routes/") && !files.includes(file) && !file.includes(".server."),
    );
    const routeLike = loose.filter((file) =>
      /export (default|async function (loader|action)|function (loader|action))/.test(
        readFileSync(path.join(APP, file), "utf8"),
      ),
    );
    expect(routeLike).toEqual([]);
  });

  it("ends every branch that programs call with a route for the rest", () => {
    const root = readFileSync(path.join(APP, "routes.ts"), "utf8");
    expect(root).toMatch(/route\("\*", "routes\/not-found\.tsx"\),\n\]/);
    expect(root).toContain('route("*", "routes/api/not-found.ts")');
  });

  it("leaves access to the services: every route with data calls one, or shows none (C01)", () => {
    /** Routes that show nothing of any team, each with its reason. */
    const OPEN = new Set([
      "routes/methods.tsx", // reference page, no data
      "routes/formats.tsx", // reference page, no data
      "routes/api-reference.tsx", // reference page, no data
      "routes/theme.ts", // a cookie of the caller's own
      "routes/healthz.ts", // that the process lives
      "routes/not-found.tsx", // nothing
      "routes/api/layout.ts", // the door itself
      "routes/api/not-found.ts", // nothing
      "routes/api/openapi.ts", // description, public
    ]);
    const bare = files.filter((file) => {
      if (OPEN.has(file)) return false;
      const text = readFileSync(path.join(APP, file), "utf8");
      const hasData = /export (async )?(function|const) (loader|action)\b/.test(text);
      return hasData && !/from "(~|\.\.)[^"]*\/services\//.test(text) && !/redirect\(/.test(text);
    });
    expect(bare).toEqual([]);
  });
});
