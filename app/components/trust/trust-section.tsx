import { href } from "react-router";
import { SectionHead } from "~/components/ui/finding";
import { TextLink } from "~/components/ui/text-link";
import { SectionState } from "~/components/workbench/section-state";
import type { AveragesView } from "~/lib/averages/averages-view";
import type { TrustView } from "~/lib/trust/trust-view";

/** How far to trust the result. */
export function TrustSection(_: { averages: AveragesView; trust: TrustView }) {
  return (
    <section aria-labelledby="section-title">
      <SectionHead
        id="section-title"
        title="Trust"
        aside={<TextLink to={`${href("/methods")}#uncertainty`}>How this is computed</TextLink>}
      />
      <SectionState />
    </section>
  );
}
