import {
  matchRoutes,
  type RouteObject,
  type RouterContextProvider,
  type ServerBuild,
  UNSAFE_withComponentProps as withComponentProps,
  UNSAFE_withErrorBoundaryProps as withErrorBoundaryProps,
} from "react-router";
import { application } from "~/application.server";
import * as entry from "~/entry.server";
import { isApiPath } from "~/middleware/api-path.server";
import routeTable from "~/routes";

interface RouteEntry {
  id?: string;
  path?: string;
  index?: boolean;
  file: string;
  children?: RouteEntry[];
}

export interface TableRow {
  id: string;
  parentId: string | undefined;
  path: string | undefined;
  index: boolean;
  file: string;
}

const modules = import.meta.glob(["../../app/routes/**/*.{ts,tsx}", "../../app/root.tsx", "!**/*.test.*"]);

/** Every route of app/routes.ts in one list, parents first. */
export function routeRows(entries = routeTable as unknown as RouteEntry[], parentId = "root"): TableRow[] {
  return entries.flatMap((entry) => {
    const id = entry.file.replace(/\.tsx?$/, "");
    const { path, index = false, file, children = [] } = entry;
    return [{ id, parentId, path, index, file }, ...routeRows(children, id)];
  });
}

type RouteModule = NonNullable<ServerBuild["routes"][string]>["module"];

/** What the build does to components: they get `loaderData`, `actionData` and the like as props. */
function withProps(module: RouteModule): RouteModule {
  const { default: page, ErrorBoundary: boundary } = module;
  return {
    ...module,
    ...(page ? { default: withComponentProps(page as never) } : {}),
    ...(boundary ? { ErrorBoundary: withErrorBoundaryProps(boundary as never) } : {}),
  } as RouteModule;
}

async function loadRoute(row: TableRow): Promise<[string, ServerBuild["routes"][string]]> {
  const load = modules[`../../app/${row.file}`];
  if (load === undefined) throw new Error(`${row.file} stands in routes.ts and is not there.`);
  const module = withProps((await load()) as RouteModule);
  const { id, parentId, path, index } = row;
  return [
    id,
    { id, parentId, path, index: index ? true : undefined, module } as ServerBuild["routes"][string],
  ];
}

function manifestRoutes(routes: ServerBuild["routes"]): ServerBuild["assets"]["routes"] {
  const rows = Object.entries(routes).map(([id, route]) => {
    const { parentId, path, index, module } = route ?? { module: {} };
    const has = (name: string) => name in module;
    return [
      id,
      {
        ...{ id, parentId, path, index, module: `/${id}.js`, imports: [], css: [] },
        ...{ clientActionModule: undefined, clientLoaderModule: undefined },
        ...{ clientMiddlewareModule: undefined, hydrateFallbackModule: undefined },
        ...{ hasAction: has("action"), hasLoader: has("loader"), hasErrorBoundary: has("ErrorBoundary") },
        ...{
          hasClientAction: false,
          hasClientLoader: false,
          hasClientMiddleware: false,
          hasDefaultExport: has("default"),
        },
      },
    ];
  });
  return Object.fromEntries(rows);
}

const ROOT: TableRow = { id: "root", parentId: undefined, path: "", index: false, file: "root.tsx" };
const rows = [ROOT, ...routeRows()];

/** Ids of the routes that an address matches, from the root on. */
function branchOf(pathname: string): string[] {
  const nest = (parentId: string): RouteObject[] =>
    rows
      .filter((row) => row.parentId === parentId)
      .map(({ id, path, index }) => (index ? { id, index: true } : { id, path, children: nest(id) }));
  const asked = isApiPath(pathname) ? pathname : pathname.replace(/\.data$/, "");
  const matches = matchRoutes(nest("root"), asked) ?? [];
  return ["root", ...matches.map(({ route }) => route.id ?? "")];
}

/**
 * The application as the router serves it, put together from the sources instead of a build. Only the routes of the
 * branch are loaded: a test of one door does not need the whole house.
 */
async function makeBuild(branch: string[]): Promise<ServerBuild> {
  const loaded = await Promise.all(rows.filter((row) => branch.includes(row.id)).map(loadRoute));
  const others = rows.map(({ id, parentId, path, index }) => [
    id,
    { id, parentId, path, index: index ? true : undefined, module: {} },
  ]);
  const routes: ServerBuild["routes"] = Object.fromEntries([...others, ...loaded]);
  return {
    entry: { module: entry },
    routes,
    assets: {
      entry: { imports: [], module: "/entry.client.js" },
      routes: manifestRoutes(routes),
      url: "/manifest.js",
      version: "tests",
    },
    publicPath: "/",
    assetsBuildDirectory: "",
    allowedActionOrigins: ["**"],
    future: {
      v8_middleware: true,
      v8_passThroughRequests: true,
      v8_splitRouteModules: true,
      v8_trailingSlashAwareDataRequests: true,
      v8_viteEnvironmentApi: true,
    },
    ssr: true,
    isSpaMode: false,
    prerender: [],
    routeDiscovery: { mode: "initial", manifestPath: "/__manifest" },
  } as unknown as ServerBuild;
}

const handlers = new Map<string, Promise<ReturnType<typeof application.makeHandler>>>();

function handlerFor(pathname: string) {
  const branch = branchOf(pathname);
  const key = branch.join(" ");
  let handler = handlers.get(key);
  if (handler === undefined) {
    handler = makeBuild(branch).then((build) => application.makeHandler(build, "production"));
    handlers.set(key, handler);
  }
  return handler;
}

export const ORIGIN = "http://127.0.0.1:3000";

export interface CallOptions extends RequestInit {
  /** Value of the Cookie header. */
  cookie?: string;
  /** Bearer token. */
  token?: string;
  /** Origin header; unsafe calls without a token name our own unless told otherwise. */
  origin?: string | null;
  /** Fields of a form, sent as a browser sends it. */
  form?: Record<string, string>;
  address?: string;
}

/** Sends one request through the whole application, root middleware included. */
export async function call(path: string, options: CallOptions = {}): Promise<Response> {
  const { cookie, token, origin, form, address = "192.0.2.1", ...init } = options;
  const headers = new Headers(init.headers);
  const method = init.method ?? (form ? "POST" : "GET");
  if (cookie) headers.set("cookie", cookie);
  if (token) headers.set("authorization", `Bearer ${token}`);
  const named = origin === undefined && method !== "GET" && token === undefined ? ORIGIN : origin;
  if (named) headers.set("origin", named);
  const body = form ? new URLSearchParams(form) : init.body;
  const duplex = body instanceof ReadableStream ? { duplex: "half" as const } : {};
  const request = new Request(new URL(path, ORIGIN), { ...init, ...duplex, method, headers, body });
  return handle(request, application.makeContext(address));
}

/** What the server gives a request to. */
export async function handle(request: Request, context: RouterContextProvider): Promise<Response> {
  const handler = await handlerFor(new URL(request.url).pathname);
  return handler(request, context);
}

/** The cookie that a response sets, as the next request sends it; null where it sets none or ends one. */
export function cookieOf(response: Response): string | null {
  const pairs = response.headers.getSetCookie().map((line) => line.split(";", 1)[0] ?? "");
  const session = pairs.find((pair) => pair.startsWith("lowlying-") || pair.startsWith("__Host-"));
  return session === undefined || session.endsWith("=") ? null : session;
}
