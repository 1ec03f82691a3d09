import type { ReactNode } from "react";
import { pageClass } from "~/components/layout/app-shell";
import { Badge } from "~/components/ui/badge";
import { Formula } from "~/components/ui/formula";
import { LevelName } from "~/components/ui/level-marker";
import { plural } from "~/lib/format";
import type { EnsembleView } from "~/lib/views";
import { FlatMoleculeDrawing } from "./flat-drawing";

const CHIRALITY: Record<EnsembleView["chirality"], string> = {
  achiral: "achiral",
  chiral: "chiral",
  unsure: "chirality unsure, taken as chiral",
};

/** Name, formula, counts and levels of the ensemble, its flat drawing, and at most two buttons. */
export function WorkbenchHeader({
  ensemble,
  positions,
  rename,
  actions,
}: {
  ensemble: EnsembleView;
  /** Of one frame, for the configuration in the drawing. */
  positions: Float64Array | null;
  rename?: ReactNode;
  actions: ReactNode;
}) {
  return (
    <div className={`${pageClass} flex items-end gap-6 pt-4 pb-3 max-sm:block sm:pt-6 sm:pb-4`}>
      <div className="min-w-0 flex-1">
        <h1 className="text-lg font-semibold tracking-title break-words sm:text-xl">{ensemble.name}</h1>
        <div className="figures mt-2 flex flex-wrap items-center gap-x-4 gap-y-1 text-ink-2 sm:gap-x-6">
          <Formula>{ensemble.formula}</Formula>
          <span>{plural(ensemble.atoms, "atom")}</span>
          <span>{plural(ensemble.frames, "frame")}</span>
          <span title={ensemble.chiralityNote || undefined}>{CHIRALITY[ensemble.chirality]}</span>
          {ensemble.levels.map((level) => (
            <LevelName key={level.id} name={level.name} ordinal={level.ordinal} />
          ))}
          {ensemble.role === "guest" ? (
            <Badge tone="locked">Example, read only</Badge>
          ) : ensemble.role === "reader" ? (
            <Badge tone="locked">Read only</Badge>
          ) : ensemble.example ? (
            <Badge title="Anybody may look at it from the front page.">Example</Badge>
          ) : null}
          {rename}
        </div>
      </div>
      <div className="shrink-0 max-md:hidden">
        <FlatMoleculeDrawing
          elements={ensemble.elements}
          bonds={ensemble.bonds}
          table={ensemble.bondTable}
          positions={positions}
          name={ensemble.name}
        />
      </div>
      <div className="flex flex-wrap gap-2 print:hidden max-sm:mt-3 max-sm:[&>*]:flex-1">{actions}</div>
    </div>
  );
}
