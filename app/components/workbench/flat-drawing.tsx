import { useEffect, useState } from "react";
import { symbolOf } from "~/lib/chem/elements";
import { type FlatDrawing, type FlatLabel, flatLayout } from "~/lib/workbench/flat-layout";

const BOX = { width: 240, height: 92 };
const HUES: Record<number, string> = {
  1: "fill-atom-h",
  6: "fill-atom-c",
  7: "fill-atom-n",
  8: "fill-atom-o",
  9: "fill-atom-f",
  15: "fill-atom-p",
  16: "fill-atom-s",
  17: "fill-atom-cl",
  35: "fill-atom-br",
  53: "fill-atom-i",
};
const ORDER_WORDS = {
  file: "bond orders of the file",
  perceived: "bond orders perceived from valences",
  unknown: "plain graph, bond orders not perceived",
};
/** A drawing of this size would be a grey patch. */
const MAX_HEAVY = 60;

/** The molecule on paper, drawn in the browser once its library is there; nothing where it cannot be drawn. */
export function FlatMoleculeDrawing({
  elements,
  bonds,
  positions,
  table = null,
  name,
}: {
  elements: readonly number[];
  bonds: readonly number[];
  /** Of one frame, for the configuration. */
  positions: Float64Array | null;
  /** Orders and charges as the file states them. */
  table?: { orders: readonly number[]; charges: readonly number[] } | null;
  name: string;
}) {
  const [drawing, setDrawing] = useState<(FlatDrawing & { orders: "file" | "perceived" | "unknown" }) | null>(
    null,
  );
  const wanted = elements.filter((element) => element > 1).length <= MAX_HEAVY;
  useEffect(() => {
    if (!wanted) return;
    let left = false;
    import("./draw-molecule.client")
      .then(({ drawMolecule }) => {
        const molecule = left ? null : drawMolecule(elements, bonds, positions, table);
        if (!molecule || left) return;
        setDrawing({
          ...flatLayout(molecule.atoms, molecule.bonds, BOX, symbolOf),
          orders: molecule.orders,
        });
      })
      // Without its drawing the page says everything it has to say.
      .catch(() => undefined);
    return () => {
      left = true;
    };
  }, [wanted, elements, bonds, positions, table]);
  if (!drawing) return null;
  const words = ORDER_WORDS[drawing.orders];
  return (
    <svg
      role="img"
      aria-label={`Flat drawing of ${name}, ${words}`}
      width={drawing.width}
      height={drawing.height}
      className="overflow-visible"
    >
      <title>{`${name}; ${words}`}</title>
      <g className="fill-none stroke-ink-2" strokeWidth={1.4} strokeLinecap="round">
        {drawing.lines.map((line, k) => (
          <path key={k} d={`M${line.x1} ${line.y1}L${line.x2} ${line.y2}`} />
        ))}
      </g>
      <g className="fill-ink-2">
        {drawing.wedges.map((points) => (
          <polygon key={points} points={points} />
        ))}
      </g>
      {drawing.labels.map((label, k) => (
        <Letters key={k} label={label} />
      ))}
    </svg>
  );
}

/** Symbol, hydrogens and charge of an atom, in the colour of its element. */
export function Letters({ label }: { label: FlatLabel }) {
  const { x, y, symbol, hydrogens, charge, side } = label;
  const hydrogen = hydrogens > 0 ? "H" : "";
  const beside = side === "right" || side === "left";
  const dx = side === "left" ? -4.5 * symbol.length - 1 : 4.5 * symbol.length + 1;
  return (
    <g className={`${HUES[label.element] ?? "fill-atom-other"} text-xs`}>
      <text x={x} y={y + 4.2} textAnchor="middle">
        {symbol}
      </text>
      {hydrogen ? (
        <text
          x={beside ? x + dx : x}
          y={beside ? y + 4.2 : y + (side === "below" ? 15 : -6.5)}
          textAnchor={beside ? (side === "left" ? "end" : "start") : "middle"}
        >
          {hydrogen}
          {hydrogens > 1 ? (
            <tspan dy={3} fontSize={9}>
              {hydrogens}
            </tspan>
          ) : null}
        </text>
      ) : null}
      {charge !== 0 ? (
        <text x={x + 5} y={y - 3} fontSize={9}>
          {Math.abs(charge) > 1 ? Math.abs(charge) : ""}
          {charge > 0 ? "+" : "\u2212"}
        </text>
      ) : null}
    </g>
  );
}
