import { Segments } from "~/components/ui/segments";
import type { HydrogenMode, ViewMode } from "~/lib/url-state";

const MODES = [
  { value: "overlay", label: "Overlay" },
  { value: "side", label: "Side by side" },
  { value: "one", label: "One" },
] as const;

const HYDROGENS = [
  { value: "none", label: "No H" },
  { value: "polar", label: "Polar H" },
  { value: "all", label: "All H" },
] as const;

/** How the conformers stand, and which hydrogens are drawn. On narrow screens the hydrogens move into the options. */
export function ViewBar({
  mode,
  onMode,
  hydrogens,
  onHydrogens,
  end,
}: {
  mode: ViewMode;
  onMode: (mode: ViewMode) => void;
  hydrogens: HydrogenMode;
  onHydrogens: (hydrogens: HydrogenMode) => void;
  /** What stands in the place of the hydrogens below 1024 px. */
  end?: React.ReactNode;
}) {
  return (
    <div className="mt-2 flex flex-wrap items-center justify-between gap-2 print:hidden">
      <Segments label="Arrangement" hideLabel size="sm" value={mode} options={MODES} onChange={onMode} />
      <HydrogenSegments hydrogens={hydrogens} onHydrogens={onHydrogens} className="max-lg:hidden" />
      {end}
    </div>
  );
}

export function HydrogenSegments({
  hydrogens,
  onHydrogens,
  className,
}: {
  hydrogens: HydrogenMode;
  onHydrogens: (hydrogens: HydrogenMode) => void;
  className?: string;
}) {
  return (
    <Segments
      label="Hydrogens"
      hideLabel
      size="sm"
      value={hydrogens}
      options={HYDROGENS}
      onChange={onHydrogens}
      className={className}
    />
  );
}
