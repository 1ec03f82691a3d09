import { useEffect, useRef } from "react";
import { Form, href, Link, useLocation } from "react-router";
import { labelClass } from "~/components/ui/field";
import type { Theme } from "~/lib/theme";
import { useShellData } from "./shell-data";

/**
 * Letters in the ring: of the last two words of a name, else its first two.
 *
 * @example initials("Demo analyst") // "DA"
 */
export function initials(name: string): string {
  const words = name.trim().split(/\s+/).filter(Boolean);
  const [first = "?"] = words;
  const letters = words.length > 1 ? `${first[0]}${words.at(-1)?.[0] ?? ""}` : first.slice(0, 2);
  return letters.toUpperCase();
}

const ENTRY =
  "flex min-h-9 w-full items-center rounded-sm px-3 text-left text-ink no-underline hover:bg-sunk pointer-coarse:min-h-11";

/** Who is signed in, day or night, the teams, the way out. A native popover with plain forms: it works without script. */
export function AccountMenu() {
  const { user, theme } = useShellData();
  const { key } = useLocation();
  const menu = useRef<HTMLDivElement>(null);
  // Without script every choice loads a page and so closes the menu; with it the router does not.
  // biome-ignore lint/correctness/useExhaustiveDependencies: the key of the address is what closes it
  useEffect(() => {
    if (menu.current?.matches(":popover-open")) menu.current.hidePopover();
  }, [key]);
  if (!user) return null;
  return (
    <div className="relative">
      <button
        type="button"
        popoverTarget="account"
        aria-label={`Account of ${user.name}`}
        className="grid size-7 place-items-center rounded-full border border-edge text-xs font-medium text-ink-2 hover:text-ink pointer-coarse:size-11"
      >
        {initials(user.name)}
      </button>
      <div
        ref={menu}
        id="account"
        popover="auto"
        className="absolute top-12 right-4 left-auto m-0 w-64 rounded-md border border-rule-2 bg-sheet p-1 text-sm text-ink shadow-float xl:right-8"
      >
        <p className="px-3 pt-2 pb-3">
          <span className="block font-medium">{user.name}</span>
          <span className="block text-xs break-words text-ink-3">{user.email}</span>
        </p>
        <div className="border-t border-rule px-3 py-3">
          <ThemeSwitch theme={theme} />
        </div>
        <div className="border-t border-rule pt-1">
          {user.teams.map((team) => (
            <Link key={team.id} to={href("/teams/:team", { team: team.id })} className={ENTRY}>
              <span className="truncate">Team {team.name}</span>
            </Link>
          ))}
          <Link to={href("/account")} className={ENTRY}>
            Your account
          </Link>
          <Form method="post" action={href("/logout")}>
            <button type="submit" className={ENTRY}>
              Sign out
            </button>
          </Form>
        </div>
      </div>
    </div>
  );
}

const THEMES: readonly { value: Theme | ""; label: string }[] = [
  { value: "", label: "System" },
  { value: "light", label: "Day" },
  { value: "dark", label: "Night" },
];

/** Day, night, or as the system says: three buttons of a form. */
export function ThemeSwitch({ theme }: { theme: Theme | null }) {
  const location = useLocation();
  return (
    <Form method="post" action={href("/theme")} preventScrollReset replace>
      <input type="hidden" name="back" value={`${location.pathname}${location.search}`} />
      <p id="theme-label" className={`mb-2 ${labelClass}`}>
        Chart by
      </p>
      {/* biome-ignore lint/a11y/useSemanticElements: a fieldset would announce a form inside the menu; the buttons act at once */}
      <div
        role="group"
        aria-labelledby="theme-label"
        className="inline-flex overflow-hidden rounded-md border border-edge bg-sheet"
      >
        {THEMES.map(({ value, label }) => (
          <button
            key={label}
            type="submit"
            name="theme"
            value={value}
            aria-pressed={(theme ?? "") === value}
            className="h-7 border-l border-rule-2 px-3 text-xs font-medium text-ink-2 first:border-l-0 hover:bg-sunk focus-visible:-outline-offset-2 aria-pressed:bg-action aria-pressed:text-on-action pointer-coarse:h-11"
          >
            {label}
          </button>
        ))}
      </div>
    </Form>
  );
}
