import { type AverageRule, RULE_WORDS } from "~/lib/averages/rule";

/** A rule as it is printed: r⁻⁶ with its figures raised. */
export function RuleName({ rule }: { rule: AverageRule }) {
  if (rule !== "r-6" && rule !== "r-3") return <>{RULE_WORDS[rule].name}</>;
  return (
    <>
      r<sup>−{rule.slice(2)}</sup>
    </>
  );
}
