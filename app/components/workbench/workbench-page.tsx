import { ArrowRight, Link2 } from "lucide-react";
import { type ReactNode, useEffect, useMemo, useRef } from "react";
import { href, useLocation, useNavigation, useRevalidator } from "react-router";
import { FigureFacts } from "~/components/charts/figure-facts";
import { AppShell, pageClass } from "~/components/layout/app-shell";
import { OutsideTorsions, OutsideViewPanel } from "~/components/outside/outside-view";
import { Button, ButtonLink } from "~/components/ui/button";
import { BesideField } from "~/components/ui/number-field";
import { showToast } from "~/components/ui/toast";
import { useFocusRefuge } from "~/hooks/use-focus-refuge";
import { hasEnded, useRunningSift } from "~/hooks/use-sift";
import { searchOf, writeState } from "~/lib/url-state";
import type { EnsembleView, IntakeView, SiftView } from "~/lib/views";
import { recipeLine } from "~/lib/workbench/recipe-words";
import { stations } from "~/lib/workbench/stations";
import { DecisionsProvider } from "./decisions";
import { FilePanel } from "./file-panel";
import { RenameEnsemble } from "./rename-ensemble";
import { SectionRail } from "./section-rail";
import { ViewPanel } from "./view-panel";
import { useWorkbench, WorkbenchProvider } from "./workbench-context";
import { WorkbenchHeader } from "./workbench-header";

/** Pages that belong to a station of another name. */
const STATION_OF: Record<string, string> = { compare: "distinct-set", plan: "levels", columns: "intake" };

/** Sections whose view folds away below 1024 px: they are read, not looked at. */
const WITHOUT_VIEW = ["hand-over", "logbook"];

export interface WorkbenchData {
  ensemble: EnsembleView;
  sift: SiftView | null;
  /** Where the sift came to nothing: the one that is shown when none is named; null where that has no set either. */
  lastSet: string | null;
  intake: IntakeView;
}

/** What the figures of every section belong to, unless the section says otherwise. */
function SharedFacts({ children }: { children: ReactNode }) {
  const { temperatureK, level, populations } = useWorkbench();
  return (
    <FigureFacts
      facts={[
        { name: "temperature", unit: "K", value: temperatureK },
        { name: "level", value: level?.name ?? null },
        { name: "weights", value: populations?.weights.kind ?? null },
      ]}
    >
      {children}
    </FigureFacts>
  );
}

/** Header, rail and view around the sections; one page, whatever section is open. */
export function WorkbenchPage({
  ensemble,
  sift,
  lastSet,
  intake,
  children,
}: WorkbenchData & { children: ReactNode }) {
  const { pathname, search } = useLocation();
  const section = pathname.split("/")[3] ?? "populations";
  const followed = useFollowedSift(sift);
  return (
    <WorkbenchProvider
      ensemble={ensemble}
      sift={followed}
      lastSet={lastSet}
      section={section}
      first={firstFrame(intake)}
    >
      <DecisionsProvider ensembleId={ensemble.id}>
        <BesideField value={search}>
          <SharedFacts>
            <Frame section={section} intake={intake}>
              {children}
            </Frame>
          </SharedFacts>
        </BesideField>
      </DecisionsProvider>
    </WorkbenchProvider>
  );
}

/** The sift of the loader; while it runs its progress is followed, and its end fetches the result. */
function useFollowedSift(sift: SiftView | null): SiftView | null {
  const { revalidate, state: fetching } = useRevalidator();
  const navigation = useNavigation();
  const runs = sift !== null && (sift.status === "queued" || sift.status === "running");
  const state = useRunningSift(runs ? sift.id : null);
  const over = runs && state !== null && hasEnded(state.status);
  const idle = fetching === "idle" && navigation.state === "idle";
  // Asked for in the middle of a navigation it would be lost in it: it waits for that to be over.
  useEffect(() => {
    if (over && idle) void revalidate();
  }, [over, idle, revalidate]);
  return useMemo(
    () =>
      sift && runs && state
        ? {
            ...sift,
            status: over ? "running" : state.status,
            progress: over ? 1 : state.progress,
            ...(state.pairs === undefined ? {} : { pairs: state.pairs }),
            ...(state.silent ? { silent: true as const } : {}),
          }
        : sift,
    [sift, runs, state, over],
  );
}

function Frame({ section, intake, children }: { section: string; intake: IntakeView; children: ReactNode }) {
  const { ensemble, sift, result, temperatureK, coordinates } = useWorkbench();
  const held = useMemo(() => new Set(framesIn(intake.strip, "h")), [intake.strip]);
  const base = href("/ensembles/:id", { id: ensemble.id });
  const lowest = result?.kept[0]?.frame;
  const positions = lowest === undefined ? null : (coordinates.positions.get(lowest) ?? null);
  const sections = useRef<HTMLDivElement>(null);
  const keepFocus = useFocusRefuge(() => sections.current?.querySelector<HTMLElement>("[data-finding]"));
  const asks = section === "intake" && ensemble.openQuestions > 0;
  return (
    <AppShell
      results={result !== null}
      recipe={
        sift
          ? `Recipe: ${recipeLine(sift.recipe, sift.recipe.level === null ? null : temperatureK)}`
          : ensemble.openQuestions > 0
            ? "No recipe yet: intake waits for an answer."
            : "No recipe yet."
      }
    >
      <WorkbenchHeader
        ensemble={ensemble}
        positions={positions}
        rename={ensemble.mayCompute ? <RenameEnsemble ensemble={ensemble} /> : null}
        actions={<HeaderActions section={section} />}
      />
      <SectionRail
        base={base}
        here={STATION_OF[section] ?? section}
        stations={stations(ensemble, sift, temperatureK)}
      />
      <div
        className={`${pageClass} grid gap-x-7 pt-4 pb-12 sm:pt-6 lg:grid-cols-[20rem_minmax(0,1fr)] xl:grid-cols-[26.25rem_minmax(0,1fr)] xl:gap-x-10 xl:pt-7 xl:pb-16`}
      >
        <aside
          aria-label="3D view"
          className={`min-w-0 self-start max-lg:mb-6 lg:sticky lg:top-22 lg:max-h-[calc(100dvh-6rem)] lg:overflow-y-auto lg:p-1 lg:-m-1 ${
            WITHOUT_VIEW.includes(section) ? "max-lg:hidden" : ""
          } ${asks ? "max-lg:order-2 max-lg:mt-9" : ""}`}
        >
          <div className="noscript:hidden">
            {section === "compare" ? <OutsideViewPanel /> : <ViewPanel held={held} />}
          </div>
          <p className="hidden max-w-read text-ink-3 noscript:block">
            The 3D view needs script. What it measures and what is drawn beside it stands in the tables.
          </p>
          {section === "compare" ? (
            <div className="max-lg:hidden">
              <OutsideTorsions />
            </div>
          ) : null}
          {section === "intake" ? <FilePanel /> : null}
        </aside>
        {/* biome-ignore lint/a11y/noStaticElementInteractions: it watches where the focus of the controls inside is */}
        <div ref={sections} onFocus={keepFocus} className="min-w-0">
          {children}
        </div>
      </div>
    </AppShell>
  );
}

/** The frame that the view shows while there is no distinct set: the first that is not held for good. */
function firstFrame(intake: IntakeView): number | null {
  const at = intake.strip.search(/[arw]/);
  return at < 0 ? (intake.held.find((frame) => frame.showable)?.number ?? null) : at + 1;
}

/** Frame numbers of one state, from the strip. */
function framesIn(strip: string, state: string): number[] {
  const found: number[] = [];
  for (let at = strip.indexOf(state); at >= 0; at = strip.indexOf(state, at + 1)) found.push(at + 1);
  return found;
}

function HeaderActions({ section }: { section: string }) {
  const { ensemble, result } = useWorkbench();
  const { search } = useLocation();
  if (result === null) return null;
  return (
    <>
      <CopyLink />
      {section === "hand-over" ? null : (
        <ButtonLink
          kind="primary"
          to={{ pathname: href("/ensembles/:id/hand-over", { id: ensemble.id }), search }}
          icon={<ArrowRight aria-hidden="true" />}
        >
          Hand over
        </ButtonLink>
      )}
    </>
  );
}

/** Puts the address on the clipboard, with everything that is selected and with this very sift. */
function CopyLink() {
  const { sift, state } = useWorkbench();
  const { pathname } = useLocation();
  const copy = async () => {
    const search = searchOf(writeState({ ...state, sift: sift?.id ?? null }));
    try {
      await navigator.clipboard.writeText(`${window.location.origin}${pathname}${search}`);
      showToast({
        tone: "done",
        badge: "copied",
        text: "The address shows members of the team what you see now.",
      });
    } catch {
      showToast({
        tone: "failed",
        text: "The browser did not allow copying. Take the address from its bar.",
      });
    }
  };
  return (
    <Button icon={<Link2 aria-hidden="true" />} onClick={copy}>
      Copy address
    </Button>
  );
}
