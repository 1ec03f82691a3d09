import { useState } from "react";
import { useFetcher } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { QuestionCard, QuestionOption } from "~/components/ui/question-card";
import type { ActAnswer } from "~/components/workbench/act-answer";
import { averageOf, momentsOf } from "~/lib/averages/average";
import { possibleRules, RULE_WORDS } from "~/lib/averages/rule";
import { valueWords } from "~/lib/averages/words";
import { formatCount } from "~/lib/format";
import { RuleName } from "./rule-name";
import type { AveragedProperty } from "./use-averages";
import type { WeighedConformers } from "./use-weighed";

/** How a property is averaged: each rule that can be meant, with what it gives. */
export function RuleCard({
  averaged,
  weighed,
  populations,
  mirrorMerged,
}: {
  averaged: AveragedProperty;
  weighed: WeighedConformers;
  populations: Float64Array;
  mirrorMerged: boolean;
}) {
  const { property } = averaged;
  const fetcher = useFetcher<ActAnswer>();
  const now = averaged.moments.rule;
  const [wanted, setWanted] = useState(now);
  const rules = [...new Set([...possibleRules(property), now])];
  const facts = { degeneracies: weighed.kept.map((one) => one.degeneracy), mirrorMerged };
  // Stored values are merged over pairs by the rule as it is; another rule merges them anew on the server.
  const pairs = property.definition?.atoms.length ?? 1;
  const having = property.values.filter((value) => value !== null).length;
  // What was picked on the structure leaves no doubt, but for a distance.
  const settled = property.definition !== null && property.definition.observable !== "distance";
  if (rules.length < 2 || settled) return null;
  return (
    <fetcher.Form method="post" className="mt-9">
      <input type="hidden" name="intent" value="rule" />
      <input type="hidden" name="column" value={property.id} />
      <QuestionCard
        count="Rule of averaging"
        title={`How is “${property.name}” averaged?`}
        reason={`${formatCount(having)} of ${formatCount(property.values.length)} conformers have a value. The rule decides the result:${pairs > 1 ? ` (Its ${pairs} equivalent pairs are averaged anew by another rule, which moves the figures of the rules not taken a little.)` : ""}`}
        footer={
          <>
            <SubmitButton
              pending={fetcher.state !== "idle"}
              pendingLabel="Averaging…"
              disabled={wanted === now}
            >
              {wanted === now ? "Averaged by " : "Average by "}
              <span>
                <RuleName rule={wanted} />
              </span>
            </SubmitButton>
            <span>The choice is kept with the column and stands in the logbook.</span>
            {fetcher.data && fetcher.data.ok !== true ? (
              <span role="alert" className="text-danger">
                {fetcher.data.message}
              </span>
            ) : null}
          </>
        }
      >
        {rules.map((rule, k) => (
          <QuestionOption
            key={rule}
            name="rule"
            value={rule}
            checked={rule === wanted}
            onChange={() => setWanted(rule)}
            title={<RuleName rule={rule} />}
            reason={`${k === 0 ? "Proposed. " : ""}${RULE_WORDS[rule].when}`}
          >
            <span className="text-right whitespace-nowrap">
              {valueWords(
                property,
                averageOf(
                  momentsOf({ rule, unit: property.unit, values: property.values }, facts),
                  populations,
                ).value,
              )}
            </span>
          </QuestionOption>
        ))}
      </QuestionCard>
    </fetcher.Form>
  );
}
