import { type ReactNode, useCallback, useEffect, useRef, useState } from "react";
import { href, useFetcher, useLocation, useNavigation } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { BlockHead, Finding, SectionHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { TextLink } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import { SectionState } from "~/components/workbench/section-state";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { formatDate } from "~/lib/format";
import type { DeletedOutsideView, OutsideView } from "~/services/outside/list-outside.server";
import { AddStructure, type OutsideAnswerToForm } from "./add-structure";
import { ComparisonReport } from "./comparison-report";
import { useComparison, useOutsideChoice, useOutsidePage } from "./use-comparison";

const NONE: readonly OutsideView[] = [];

/**
 * A crystal or bound pose beside the distinct set: which conformers are like it, and what it costs to be it.
 *
 * @param props.answered what the server answered to a form that was sent without script
 */
export function CompareSection({ answered }: { answered: OutsideAnswerToForm | undefined }) {
  const { ensemble, result } = useWorkbench();
  const { search } = useLocation();
  const [choice, change] = useOutsideChoice();
  const page = useOutsidePage();
  const structures = page?.structures ?? NONE;
  const comparison = useComparison();
  const chosen = structures.find(({ id }) => id === choice.outside) ?? structures.at(-1) ?? null;
  const [adding, setAdding] = useState(false);
  const latest = useRef(change);
  latest.current = change;
  const choose = useCallback((id: string) => {
    setAdding(false);
    latest.current({ outside: id, over: null });
  }, []);
  const acts = useDeletion(ensemble.id, choose);
  const back = `${href("/ensembles/:id/distinct-set", { id: ensemble.id })}${search}`;
  const comparing = useNavigation().state === "loading";
  return (
    <section aria-labelledby="section-title">
      <SectionHead
        id="section-title"
        title="Against an outside structure"
        aside={<TextLink to={back}>Back to the distinct set</TextLink>}
      />
      {result === null ? (
        <SectionState />
      ) : (
        <>
          {chosen === null ? (
            <Finding more="A crystal or a bound pose is laid against the conformers: which is nearest, what it costs, and how much of it the flask holds.">
              No structure from outside lies beside this ensemble.
            </Finding>
          ) : comparison !== null ? (
            <div className={comparing ? "appear-late opacity-50" : ""} aria-busy={comparing}>
              <ComparisonReport key={chosen.id} {...{ comparison, structures, choice, change }} />
            </div>
          ) : page?.outdated ? (
            <Note tone="remark" className="mt-4">
              {chosen.name} was mapped onto the molecule as it was before its files were read again. Delete it
              and add it once more.
            </Note>
          ) : (
            <p role="status" className="mt-2 text-ink-2">
              Comparing with {chosen.name}.
            </p>
          )}
          {ensemble.mayCompute ? (
            <div className="mt-9 print:hidden">
              <BlockHead title={chosen === null ? "Add a structure" : "Other structures"}>
                {chosen !== null ? (
                  <>
                    <Button
                      size="sm"
                      className="noscript:hidden"
                      aria-expanded={adding}
                      onClick={() => setAdding(!adding)}
                    >
                      Add another structure
                    </Button>
                    <ActForm {...acts} intent="remove" id={chosen.id}>
                      Delete {chosen.name}
                    </ActForm>
                  </>
                ) : null}
              </BlockHead>
              <div className={chosen === null || adding ? "" : "hidden noscript:block"}>
                <AddStructure levels={ensemble.levels} answered={answered} onAdded={choose} />
              </div>
              <Deleted deleted={page?.deleted ?? []} acts={acts} />
            </div>
          ) : chosen === null ? (
            <p className="mt-4 text-ink-2">An analyst or an owner of the team can add one.</p>
          ) : null}
        </>
      )}
    </section>
  );
}

type Acts = ReturnType<typeof useDeletion>;

/** Structures that were deleted lately, each with the way back. */
function Deleted({ deleted, acts }: { deleted: readonly DeletedOutsideView[]; acts: Acts }) {
  if (deleted.length === 0) return null;
  return (
    <section className="mt-9 max-w-read">
      <BlockHead title="Deleted within thirty days" />
      <ul className="border-t border-rule">
        {deleted.map(({ id, name, deletedAt }) => (
          <li
            key={id}
            className="flex flex-wrap items-center justify-between gap-3 border-b border-rule py-2"
          >
            <span className="min-w-0 wrap-anywhere">
              {name} <span className="text-xs text-ink-3">deleted {formatDate(deletedAt)}</span>
            </span>
            <ActForm {...acts} intent="restore" id={id}>
              Bring back<span className="sr-only"> {name}</span>
            </ActForm>
          </li>
        ))}
      </ul>
    </section>
  );
}

/** Takes a structure away, and brings it back: from the toast for a moment, from the list for thirty days. */
function useDeletion(ensembleId: string, onBack: (id: string) => void) {
  const fetcher = useFetcher<OutsideAnswerToForm>();
  const told = useRef<OutsideAnswerToForm | undefined>(undefined);
  const action = href("/ensembles/:id/compare", { id: ensembleId });
  const last = useRef<string | null>(null);
  const { data, submit, formData } = fetcher;
  const intent = formData?.get("intent");
  if (typeof intent === "string") last.current = intent;
  useEffect(() => {
    if (!data || told.current === data) return;
    told.current = data;
    const { id } = data;
    if (!data.ok || id === undefined) showToast({ tone: "failed", text: data.message ?? "Not deleted." });
    else if (last.current === "restore") {
      showToast({ tone: "done", text: `${data.name} is back.` });
      onBack(id);
    } else {
      document.getElementById("content")?.focus({ preventScroll: true });
      showToast({
        tone: "done",
        text: `${data.name} deleted.`,
        action: {
          label: "Undo",
          act: () => void submit({ intent: "restore", outside: id }, { method: "post", action }),
        },
      });
    }
  }, [data, submit, action, onBack]);
  return { fetcher, action };
}

function ActForm({
  fetcher,
  action,
  intent,
  id,
  children,
}: Acts & { intent: "remove" | "restore"; id: string; children: ReactNode }) {
  return (
    <fetcher.Form method="post" action={action}>
      <input type="hidden" name="intent" value={intent} />
      <input type="hidden" name="outside" value={id} />
      <SubmitButton
        size="sm"
        kind={intent === "remove" ? "quiet" : "plain"}
        pending={fetcher.state !== "idle"}
      >
        {children}
      </SubmitButton>
    </fetcher.Form>
  );
}
