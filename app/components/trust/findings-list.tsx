import { href, useLocation } from "react-router";
import { useAveragesState } from "~/components/averages/use-averages-state";
import { Badge } from "~/components/ui/badge";
import { CopyButton } from "~/components/ui/copy-button";
import { BlockHead } from "~/components/ui/finding";
import { TextButton, TextLink } from "~/components/ui/text-link";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { type FindingAct, findingsText, type TrustFinding } from "~/lib/trust/findings";

const KINDS = {
  settle: { tone: "ask", words: "yours to settle" },
  know: { tone: "plain", words: "good to know" },
  nothing: { tone: "good", words: "nothing to do" },
} as const;

/** The findings, those to settle first; what to do stands at the right. No score. */
export function FindingsList({ findings }: { findings: readonly TrustFinding[] }) {
  return (
    <section className="mt-9" aria-labelledby="trust-findings">
      <BlockHead id="trust-findings" title="Findings">
        <CopyButton text={findingsText(findings)}>Copy as text</CopyButton>
      </BlockHead>
      <ul className="border-t border-rule-2">
        {findings.map((finding) => (
          <li
            key={finding.title}
            className="figures grid gap-x-6 gap-y-1 border-b border-rule py-4 sm:grid-cols-[8rem_minmax(0,1fr)] xl:grid-cols-[8rem_minmax(0,1fr)_11rem]"
          >
            <div>
              <Badge tone={KINDS[finding.kind].tone}>{KINDS[finding.kind].words}</Badge>
            </div>
            <div className="min-w-0 max-w-[40rem]">
              <p className="font-semibold">{finding.title}</p>
              <p className="mt-1 text-ink-2">{finding.reason}</p>
            </div>
            {finding.act ? (
              <div className="print:hidden sm:max-xl:col-start-2">
                <Act act={finding.act} />
                {finding.act.note ? <p className="text-xs text-ink-3">{finding.act.note}</p> : null}
              </div>
            ) : null}
          </li>
        ))}
      </ul>
    </section>
  );
}

function Act({ act }: { act: FindingAct }) {
  const { ensemble } = useWorkbench();
  const { search } = useLocation();
  const [, change] = useAveragesState();
  if (act.type === "weigh") {
    return <TextButton onClick={() => change({ by: act.level })}>{act.label}</TextButton>;
  }
  return (
    <TextLink to={{ pathname: `${href("/ensembles/:id", { id: ensemble.id })}/${act.path}`, search }}>
      {act.label}
    </TextLink>
  );
}
