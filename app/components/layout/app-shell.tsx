import { type ReactNode, type RefObject, useEffect, useRef } from "react";
import { href, Link, useLocation } from "react-router";
import { KeyHelp } from "~/components/help/key-help";
import { ButtonLink } from "~/components/ui/button";
import { linkClass } from "~/components/ui/text-link";
import { Toasts } from "~/components/ui/toast";
import { CONSTANTS_YEAR } from "~/lib/units";
import { AccountMenu } from "./account-menu";
import { Brand } from "./brand";
import { Breadcrumbs, useCrumbs } from "./breadcrumbs";
import { useShellData } from "./shell-data";

/** Sides of a page: 32, 24 below 1280, 16 below 640. */
export const pageClass = "mx-auto w-full max-w-page px-4 sm:px-6 xl:px-8";

/**
 * Bar, content and foot of every page but the doors.
 *
 * @param props.recipe left in the foot: the recipe, or what the page has instead of one
 * @param props.results true where the page shows computed results: the foot then carries the caution
 */
export function AppShell({
  recipe,
  results = false,
  children,
}: {
  recipe?: ReactNode;
  results?: boolean;
  children: ReactNode;
}) {
  const main = useRef<HTMLElement>(null);
  useFocusAfterMove(main);
  return (
    <div className="flex min-h-dvh flex-col">
      <a
        href="#content"
        className="fixed top-2 left-2 z-50 -translate-y-16 print:hidden rounded-md bg-action px-4 py-2 text-on-action focus:translate-y-0"
      >
        To the content
      </a>
      <Bar />
      <main id="content" ref={main} tabIndex={-1} className="flex-1 outline-none">
        {children}
      </main>
      <Foot recipe={recipe} results={results} />
      <Toasts />
      <KeyHelp />
    </div>
  );
}

/** The page that the browser itself loaded begins at the top, as everywhere; null once it was left. */
let loaded: string | null = typeof window === "undefined" ? null : window.location.pathname;

/**
 * On another page of ours what had the focus is gone with the last one: the content takes it, so that keys and readers
 * go on from there and not from the top of the window.
 */
function useFocusAfterMove(main: RefObject<HTMLElement | null>) {
  const { pathname } = useLocation();
  useEffect(() => {
    const lost = document.activeElement === null || document.activeElement === document.body;
    if (pathname !== loaded) loaded = null;
    if (loaded === null && lost) main.current?.focus({ preventScroll: true });
  }, [pathname, main]);
}

function Bar() {
  const crumbs = useCrumbs();
  const { user } = useShellData();
  const { pathname } = useLocation();
  return (
    <header className="h-13 border-b border-rule bg-paper print:hidden">
      <div className="flex h-full items-center gap-4 px-4 sm:px-6 xl:px-8">
        <Brand short={crumbs.length > 0} />
        {crumbs.length > 0 ? <Breadcrumbs crumbs={crumbs} /> : <References pathname={pathname} />}
        <div className="ml-auto flex items-center gap-3 print:hidden">
          {user ? (
            <AccountMenu />
          ) : (
            <ButtonLink size="sm" to={href("/login")}>
              Sign in
            </ButtonLink>
          )}
        </div>
      </div>
    </header>
  );
}

function References({ pathname }: { pathname: string }) {
  const pages = [
    { to: href("/methods"), label: "Methods" },
    { to: href("/formats"), label: "Formats" },
  ];
  return (
    <nav aria-label="Reference" className="ml-2 flex gap-4 max-sm:hidden">
      {pages.map((page) => (
        <Link
          key={page.to}
          to={page.to}
          aria-current={pathname === page.to ? "page" : undefined}
          className="text-ink-2 no-underline hover:underline aria-[current=page]:font-medium aria-[current=page]:text-ink"
        >
          {page.label}
        </Link>
      ))}
    </nav>
  );
}

/** Said wherever results stand, and in full on the methods page. */
export const CAUTION =
  "Computed estimates, to be confirmed by experiment; no basis for dosing, safety or regulatory decisions.";

function Foot({ recipe, results }: { recipe?: ReactNode; results: boolean }) {
  return (
    <footer className="break-inside-avoid border-t border-rule text-xs text-ink-3">
      <div className={`flex flex-wrap justify-between gap-x-6 gap-y-2 pt-4 pb-8 ${pageClass}`}>
        <div className="grid max-w-[60rem] gap-1">
          {recipe ? <p className="figures">{recipe}</p> : null}
          {results ? (
            <p>
              {CAUTION}{" "}
              <Link className={`${linkClass} print:hidden`} to={`${href("/methods")}#caution`}>
                In full
              </Link>
            </p>
          ) : null}
          {!recipe && !results ? <p>Lowlying keeps your original bytes, and gives them back.</p> : null}
        </div>
        <p className="-my-1 flex flex-wrap items-center gap-x-3 print:[&>a]:hidden [&>a]:py-1 pointer-coarse:[&>a]:py-3">
          <Link className={linkClass} to={href("/methods")}>
            Methods and sources
          </Link>
          <Link className={linkClass} to={href("/formats")}>
            What the readers accept
          </Link>
          <Link className={linkClass} to={href("/words")}>
            Words and keys
          </Link>
          <Link className={linkClass} to={href("/api")}>
            The API
          </Link>
          <span>Constants: {CONSTANTS_YEAR}</span>
        </p>
      </div>
    </footer>
  );
}
