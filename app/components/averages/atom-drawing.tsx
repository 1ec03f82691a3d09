import { useEffect, useState } from "react";
import { Letters } from "~/components/workbench/flat-drawing";
import { symbolOf } from "~/lib/chem/elements";
import { type FlatDrawing, flatLayout, freeDirection } from "~/lib/workbench/flat-layout";

const BOX = { width: 300, height: 220, bond: 30, margin: 18 };
/** A drawing of this size would be a grey patch. */
const MAX_HEAVY = 60;
const RING = 8;

interface Numbered extends FlatDrawing {
  /** Atom (from 0) at each point of the drawing. */
  atoms: number[];
}

/** The flat drawing with the numbers of its atoms; those looked at are ringed. Nothing where it cannot be drawn. */
export function AtomDrawing({
  elements,
  bonds,
  positions,
  table,
  numbers,
  ringed,
  name,
}: {
  elements: readonly number[];
  bonds: readonly number[];
  positions: Float64Array | null;
  table: { orders: readonly number[]; charges: readonly number[] } | null;
  /** Atoms (from 0) to be numbered; of a hydrogen its carrier is. */
  numbers: ReadonlySet<number>;
  ringed: ReadonlySet<number>;
  name: string;
}) {
  const [drawing, setDrawing] = useState<Numbered | null>(null);
  const wanted = elements.filter((element) => element > 1).length <= MAX_HEAVY;
  useEffect(() => {
    if (!wanted) return;
    let left = false;
    import("~/components/workbench/draw-molecule.client")
      .then(({ drawMolecule }) => {
        const molecule = left ? null : drawMolecule(elements, bonds, positions, table);
        if (!molecule || left) return;
        // Hydrogens are taken off in the drawing and the other atoms keep their order.
        const heavy = [...elements.keys()].filter((atom) => (elements[atom] ?? 0) > 1);
        const same =
          heavy.length === molecule.atoms.length &&
          heavy.every((atom, k) => elements[atom] === molecule.atoms[k]?.element);
        if (!same) return;
        setDrawing({ ...flatLayout(molecule.atoms, molecule.bonds, BOX, symbolOf), atoms: heavy });
      })
      // Without its drawing the table says everything it has to say.
      .catch(() => undefined);
    return () => {
      left = true;
    };
  }, [wanted, elements, bonds, positions, table]);
  if (!drawing) return null;
  const carriers = carriersOf(elements, bonds);
  const ringedHeavy = new Set([...ringed].map((atom) => carriers.get(atom) ?? atom));
  const numberedHeavy = new Set([...numbers].map((atom) => carriers.get(atom) ?? atom));
  const labelled = new Set(drawing.labels.map((label) => `${label.x},${label.y}`));
  const around = neighbours(drawing, bonds);
  return (
    <svg
      role="img"
      aria-label={`Flat drawing of ${name} with the numbers of its atoms`}
      width={drawing.width}
      height={drawing.height}
      className="max-w-full overflow-visible"
      fontSize={12}
    >
      <g className="fill-none stroke-ink-2" strokeWidth={1.4} strokeLinecap="round">
        {drawing.lines.map((line) => (
          <path
            key={`${line.x1} ${line.y1} ${line.x2} ${line.y2}`}
            d={`M${line.x1} ${line.y1}L${line.x2} ${line.y2}`}
          />
        ))}
      </g>
      <g className="fill-ink-2">
        {drawing.wedges.map((points) => (
          <polygon key={points} points={points} />
        ))}
      </g>
      {drawing.labels.map((label) => (
        <Letters key={`${label.x} ${label.y}`} label={label} />
      ))}
      {drawing.points.map((point, k) => {
        const atom = drawing.atoms[k] ?? 0;
        if (!numberedHeavy.has(atom) && !ringedHeavy.has(atom)) return null;
        const on = ringedHeavy.has(atom);
        const away = freeDirection(point, around.get(atom) ?? []);
        const off = labelled.has(`${point.x},${point.y}`) ? 16 : 12;
        return (
          <g key={atom}>
            {on ? (
              <circle
                cx={point.x}
                cy={point.y}
                r={RING}
                fill="none"
                stroke="var(--color-mark)"
                strokeWidth={2}
              />
            ) : null}
            <text
              x={point.x + off * away.x}
              y={point.y + off * away.y + 4}
              textAnchor="middle"
              fill={on ? "var(--color-mark)" : "var(--color-ink-3)"}
              fontWeight={on ? 600 : 400}
              stroke="var(--color-paper)"
              strokeWidth={3}
              paintOrder="stroke"
            >
              {atom + 1}
            </text>
          </g>
        );
      })}
    </svg>
  );
}

/** Places of the drawn neighbours of each drawn atom. */
function neighbours({ atoms, points }: Numbered, bonds: readonly number[]) {
  const places = new Map(atoms.map((atom, k) => [atom, points[k]]));
  const found = new Map<number, { x: number; y: number }[]>();
  for (let k = 0; k < bonds.length; k += 2) {
    const ends = [bonds[k] ?? 0, bonds[k + 1] ?? 0] as const;
    for (const [here, there] of [ends, [ends[1], ends[0]] as const]) {
      const place = places.get(there);
      if (place && places.has(here)) found.set(here, [...(found.get(here) ?? []), place]);
    }
  }
  return found;
}

/** The atom that carries each hydrogen. */
function carriersOf(elements: readonly number[], bonds: readonly number[]): Map<number, number> {
  const carriers = new Map<number, number>();
  for (let k = 0; k < bonds.length; k += 2) {
    const [a, b] = [bonds[k] ?? 0, bonds[k + 1] ?? 0];
    if (elements[a] === 1) carriers.set(a, b);
    if (elements[b] === 1) carriers.set(b, a);
  }
  return carriers;
}
