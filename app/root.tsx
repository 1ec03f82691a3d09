import "./zod-setup.ts";
import type { ReactNode } from "react";
import {
  Links,
  Meta,
  Outlet,
  Scripts,
  ScrollRestoration,
  type ShouldRevalidateFunctionArgs,
  useRouteLoaderData,
} from "react-router";
import { ErrorPage } from "~/components/layout/closed-ways";
import { fontLinks } from "~/components/layout/font-links";
import type { ShellData } from "~/components/layout/shell-data";
import { readThemeCookie } from "~/lib/theme";
import type { Route } from "./+types/root";
import { actorContext, requestIdContext } from "./context.ts";
import { databaseGateMiddleware } from "./middleware/database-gate.server.ts";
import { requestMiddleware } from "./middleware/request.server.ts";
import { sameOriginMiddleware } from "./middleware/same-origin.server.ts";
import { sessionMiddleware } from "./middleware/session.server.ts";
import { forPage } from "./services/http.server.ts";
import { findPerson } from "./services/teams/find-person.server.ts";
import "./app.css";

/** In this order for every request: name and headers, origin, database, who calls. */
export const middleware: Route.MiddlewareFunction[] = [
  requestMiddleware,
  sameOriginMiddleware,
  databaseGateMiddleware,
  sessionMiddleware,
];

/** What the shell of every page shows: who is signed in, by day or by night. */
export async function loader({ request, context }: Route.LoaderArgs): Promise<ShellData> {
  const actor = context.get(actorContext);
  const person = await forPage(context.get(requestIdContext), () => findPerson(actor));
  return {
    user:
      person === null
        ? null
        : {
            name: person.name,
            email: person.email,
            teams: person.teams.map(({ id, name }) => ({ id, name })),
          },
    theme: readThemeCookie(request.headers.get("cookie")),
  };
}

/** Who is signed in changes by forms alone; moving a slider changes the address and asks nothing of the server. */
export function shouldRevalidate({ formMethod }: ShouldRevalidateFunctionArgs): boolean {
  return formMethod !== undefined && formMethod !== "GET";
}

export const meta: Route.MetaFunction = () => [
  { title: "Lowlying" },
  {
    name: "description",
    content: "A workbench for conformer ensembles: which conformers matter, and how sure.",
  },
];

export const links: Route.LinksFunction = () => [
  { rel: "icon", href: "/favicon.svg", type: "image/svg+xml" },
  ...fontLinks,
];

export function Layout({ children }: { children: ReactNode }) {
  // Undefined where the root loader itself failed; the page then follows the system.
  const theme = useRouteLoaderData<typeof loader>("root")?.theme ?? undefined;
  return (
    <html lang="en" data-theme={theme}>
      <head>
        <meta charSet="utf-8" />
        <meta name="viewport" content="width=device-width, initial-scale=1" />
        <meta name="color-scheme" content={theme ?? "light dark"} />
        <Meta />
        {/* Sheets of our own need no nonce; one that the browser hides from scripts would not match at hydration. */}
        <Links nonce="" />
      </head>
      <body>
        {children}
        <ScrollRestoration />
        <Scripts />
      </body>
    </html>
  );
}

export default function App() {
  return <Outlet />;
}

export function ErrorBoundary({ error }: Route.ErrorBoundaryProps) {
  return <ErrorPage error={error} />;
}
