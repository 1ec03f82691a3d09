import { DistinctSetSection } from "~/components/workbench/distinct-set-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import type { Route } from "./+types/distinct-set";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Distinct set", matches);
}

export default function DistinctSet() {
  return <DistinctSetSection />;
}
