import { useRouteLoaderData } from "react-router";
import type { Theme } from "~/lib/theme";

/** What the root loader tells every page. */
export interface ShellData {
  user: { name: string; email: string; teams: { id: string; name: string }[] } | null;
  theme: Theme | null;
}

const NOBODY: ShellData = { user: null, theme: null };

/** Who looks, and by day or night; nobody where the root loader itself failed. */
export function useShellData(): ShellData {
  return (useRouteLoaderData("root") as ShellData | undefined) ?? NOBODY;
}
