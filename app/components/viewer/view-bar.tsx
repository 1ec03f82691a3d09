import { Segments } from "~/components/ui/segments";
import type { HydrogenMode, ViewMode } from "~/lib/url-state";

/** Arrangements of conformers; a view of something else says which it has. */
export type Modes = readonly { value: ViewMode; label: string }[];

const MODES: Modes = [
  { value: "overlay", label: "Overlay" },
  { value: "side", label: "Side by side" },
  { value: "one", label: "One" },
];

const HYDROGENS = [
  { value: "none", label: "No H" },
  { value: "polar", label: "Polar H" },
  { value: "all", label: "All H" },
] as const;

/** How the conformers stand, and which hydrogens are drawn. On narrow screens the hydrogens move into the options. */
export function ViewBar({
  mode,
  modes = MODES,
  onMode,
  hydrogens,
  mostHydrogens,
  onHydrogens,
  end,
}: {
  mode: ViewMode;
  modes?: Modes;
  onMode: (mode: ViewMode) => void;
  hydrogens: HydrogenMode;
  mostHydrogens?: HydrogenMode;
  onHydrogens: (hydrogens: HydrogenMode) => void;
  /** What stands in the place of the hydrogens below 1024 px. */
  end?: React.ReactNode;
}) {
  return (
    <div className="mt-2 flex flex-wrap items-center justify-between gap-2 print:hidden">
      {modes.length > 0 ? (
        <Segments label="Arrangement" hideLabel size="sm" value={mode} options={modes} onChange={onMode} />
      ) : null}
      <HydrogenSegments
        hydrogens={hydrogens}
        most={mostHydrogens}
        onHydrogens={onHydrogens}
        className="max-lg:hidden"
      />
      {end}
    </div>
  );
}

const ORDER: readonly HydrogenMode[] = HYDROGENS.map(({ value }) => value);

/** The fewer of two choices of hydrogens. */
export function fewerHydrogens(a: HydrogenMode, b: HydrogenMode): HydrogenMode {
  return ORDER.indexOf(a) <= ORDER.indexOf(b) ? a : b;
}

/** @param most what is shown has no more hydrogens than these */
export function HydrogenSegments({
  hydrogens,
  most = "all",
  onHydrogens,
  className,
}: {
  hydrogens: HydrogenMode;
  most?: HydrogenMode;
  onHydrogens: (hydrogens: HydrogenMode) => void;
  className?: string;
}) {
  return (
    <Segments
      label="Hydrogens"
      hideLabel
      size="sm"
      value={fewerHydrogens(hydrogens, most)}
      options={HYDROGENS.map((one) => ({
        ...one,
        disabled: fewerHydrogens(one.value, most) !== one.value,
      }))}
      onChange={onHydrogens}
      className={className}
    />
  );
}
