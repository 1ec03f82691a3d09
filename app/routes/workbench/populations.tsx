import { PopulationsSection } from "~/components/workbench/populations-section";
import { sectionMeta } from "~/components/workbench/section-meta";
import type { Route } from "./+types/populations";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Populations", matches);
}

export default function Populations() {
  return <PopulationsSection />;
}
