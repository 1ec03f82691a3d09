import { useMemo } from "react";
import { Button } from "~/components/ui/button";
import { Note } from "~/components/ui/note";
import { TextButton } from "~/components/ui/text-link";
import { PicksList } from "~/components/viewer/picks-list";
import { Viewer, type ViewerProps } from "~/components/viewer/viewer";
import { failureWords } from "~/hooks/failure-words";
import { useCoordinates } from "~/hooks/use-coordinates";
import { useHovered } from "~/hooks/use-hovered";
import { useSettled } from "~/hooks/use-settled";
import { perceiveBonds } from "~/lib/chem/bonds";
import { formatCount, formatRmsd, plural, withUnit } from "~/lib/format";
import { formatMeasure, measureKind, measureLabel, measureValue } from "~/lib/measure/measure";
import { makeGraph } from "~/lib/structure";
import type { EnsembleView, SiftView } from "~/lib/views";
import { coinciding } from "~/lib/workbench/coincide";
import { frameSentence, joinWords } from "~/lib/workbench/findings";
import { type LaidOver, layOver } from "~/lib/workbench/lay-over";
import {
  frameName,
  laidOverCaption,
  MAX_COLOURED,
  type ShownFrame,
  viewPlan,
} from "~/lib/workbench/view-plan";
import { useWorkbench } from "./workbench-context";

const REST_MS = 150;
/** More names than this make a caption longer than the picture is wide. */
const NAMED_ATOMS = 4;

/** The 3D view beside every section, with what is selected below it. */
export function ViewPanel({ held }: { held: ReadonlySet<number> }) {
  const workbench = useWorkbench();
  const { ensemble, rows, roles, selected, state, change, sift, coordinates } = workbench;
  // Frames that are not kept are asked for by themselves, so that a wrong number in the address blocks nothing else.
  const own = useCoordinates(ensemble.id, ensemble.atoms, selected);
  // A row that only passes beneath the pointer, as in scrolling, lights nothing.
  const lit = useSettled(useHovered(), REST_MS);
  // Hundreds of molecules are not tinted anew at every step of the slider, but when it rests.
  const settled = useSettled(rows, REST_MS);
  const shownRows = rows.length === settled.length && rows[0]?.frame === settled[0]?.frame ? settled : rows;
  const alignedOn =
    state.align === null
      ? "aligned on heavy atoms"
      : state.align.length <= NAMED_ATOMS
        ? `aligned on ${measureLabel(ensemble.elements, state.align).replaceAll("\u2013", ", ")}`
        : `aligned on ${formatCount(state.align.length)} atoms`;
  const pair = state.pair && selected.length === 2;
  const plan = useMemo(
    () => viewPlan({ rows: shownRows, roles, held, selected, mode: state.mode, alignedOn, pair }),
    [shownRows, roles, held, selected, state.mode, alignedOn, pair],
  );
  const positions = useMemo(
    () => new Map([...coordinates.positions, ...own.positions]),
    [coordinates.positions, own.positions],
  );
  const laid = useMemo(
    () => laidOverFirst(plan.frames, positions, { ensemble, sift, held }),
    [plan.frames, positions, ensemble, sift, held],
  );
  const conformers = useMemo(
    () => conformersOf(plan.frames, positions, { ensemble, laid, roles, held, lit }),
    [plan.frames, positions, ensemble, laid, roles, held, lit],
  );
  const caption =
    laid.size === 0
      ? plan.caption
      : laidOverCaption(
          plan.frames.map(({ frame }) => frame),
          {
            roles,
            held,
            mode: state.mode,
            apart: new Map([...laid].map(([frame, { distance }]) => [frame, distance])),
          },
        );

  const hidden = useMemo(
    () => (state.mode === "overlay" ? hiddenWords(ensemble, conformers) : null),
    [state.mode, ensemble, conformers],
  );

  const picked = useMemo(
    () => state.atoms.filter((atom) => atom < ensemble.atoms),
    [state.atoms, ensemble.atoms],
  );
  const kind = measureKind(picked);
  const value = (frame: number) => {
    const at = positions.get(frame);
    return kind !== null && at ? formatMeasure(kind, measureValue(at, picked)) : null;
  };
  const label = kind === null ? null : measureLabel(ensemble.elements, picked);
  const first = selected[0];
  const firstValue = first === undefined ? null : value(first);
  const populationOf = new Map(shownRows.map((row) => [row.frame, row.population]));
  const over = selected.length === 2 && selected[1] !== undefined ? roles.get(selected[1]) : undefined;
  const error = own.error ?? coordinates.error;

  return (
    <>
      <Viewer
        elements={ensemble.elements}
        bonds={ensemble.bonds}
        conformers={conformers}
        anchor={workbench.anchor === null ? null : (positions.get(workbench.anchor) ?? null)}
        alignOn={state.align}
        picked={picked}
        onPick={(atoms) => change({ atoms })}
        hydrogens={state.hydrogens}
        mode={state.mode}
        onMode={(mode) => change({ mode })}
        onHydrogens={(hydrogens) => change({ hydrogens })}
        caption={caption}
        measures={label !== null && firstValue !== null ? [{ label, text: firstValue }] : []}
        title={ensemble.name}
      >
        <PicksList
          picks={selected.map((frame) => {
            const role = roles.get(frame);
            return {
              frame,
              ...(role?.kind === "kept" && !held.has(frame) ? { name: role.name } : {}),
              population: populationOf.get(frame) ?? null,
              measure: value(frame),
              held: held.has(frame),
            };
          })}
          measureLabel={label}
        />
        <AlignChoice picked={picked} align={state.align} onAlign={(align) => change({ align })} />
      </Viewer>
      {hidden === null ? null : <p className="mt-2 text-xs text-ink-2">{hidden}</p>}
      {error ? (
        <Note tone="danger" className="mt-3">
          {failureWords(error)}{" "}
          <TextButton
            onClick={() => {
              own.retry();
              coordinates.retry();
            }}
          >
            Try again
          </TextButton>
        </Note>
      ) : coordinates.missing > 0 && rows.length > 0 ? (
        <p role="status" className="appear-late mt-2 text-xs text-ink-3 print:hidden">
          {plural(coordinates.missing, "structure")} on the way
        </p>
      ) : plan.notDrawn > 0 ? (
        <p className="mt-2 text-xs text-ink-3">
          {plural(plan.notDrawn, "less populated conformer")} not drawn.
        </p>
      ) : null}
      {over?.kind === "repeat" && over.repeats === first && selected[1] !== undefined ? (
        <Note tone="mark" className="mt-4">
          {frameSentence(selected[1], over)}
          {over.mirror
            ? ` The molecule counts as achiral, so both hands are equally likely: ${over.name} stands for the pair and counts twice.`
            : ""}
        </Note>
      ) : null}
    </>
  );
}

/** Lays everything over the picked atoms, or over the heavy ones again. */
function AlignChoice({
  picked,
  align,
  onAlign,
}: {
  picked: readonly number[];
  align: readonly number[] | null;
  onAlign: (align: number[] | null) => void;
}) {
  const same =
    align !== null && align.length === picked.length && align.every((atom) => picked.includes(atom));
  const offer = picked.length >= 3 && !same;
  if (!offer && align === null) return null;
  return (
    <div className="flex flex-wrap gap-2">
      {offer ? (
        <Button size="sm" onClick={() => onAlign([...picked])}>
          Align on the picked atoms
        </Button>
      ) : null}
      {align !== null ? (
        <Button size="sm" onClick={() => onAlign(null)}>
          Align on heavy atoms
        </Button>
      ) : null}
    </div>
  );
}

/** Structures in atom colours that lie where the first one does are drawn, but cannot be seen. */
function hiddenWords(ensemble: EnsembleView, conformers: ViewerProps["conformers"]): string | null {
  const drawn = conformers.filter(({ selected, tone }) => selected && tone !== "held").slice(0, MAX_COLOURED);
  const [first] = drawn;
  if (first === undefined || drawn.length < 2) return null;
  const named = drawn.map(({ name = "", positions }) => ({ name, positions: Float64Array.from(positions) }));
  const found = coinciding(makeGraph(Uint8Array.from(ensemble.elements), ensemble.bonds), named);
  if (found.length === 0) return null;
  const farthest = found.reduce((most, { rmsd }) => Math.max(most, rmsd), 0);
  const near = withUnit(formatRmsd(farthest), "Å");
  return `${joinWords(found.map(({ name }) => name))} ${found.length === 1 ? "lies" : "lie"} just where ${first.name} does (heavy atoms, RMSD ${near}${found.length === 1 ? "" : " at most"}): they are seen as one. “Side by side” shows each.`;
}

function conformersOf(
  frames: readonly ShownFrame[],
  positions: ReadonlyMap<number, Float64Array>,
  around: {
    ensemble: EnsembleView;
    laid: ReadonlyMap<number, LaidOver>;
    roles: Parameters<typeof frameName>[1];
    held: ReadonlySet<number>;
    lit: number | null;
  },
): ViewerProps["conformers"] {
  const coloured = frames.filter((one) => one.selected).length;
  return frames.flatMap((one) => {
    const at = positions.get(one.frame);
    if (!at) return [];
    return [
      {
        frame: one.frame,
        name: frameName(one.frame, around.roles, around.held),
        positions: around.laid.get(one.frame)?.positions ?? at,
        population: one.population,
        selected: one.selected || (around.lit === one.frame && coloured < MAX_COLOURED),
        ...(one.held
          ? {
              tone: "held" as const,
              bonds: [...perceiveBonds(Uint8Array.from(around.ensemble.elements), at).bonds],
            }
          : {}),
      },
    ];
  });
}

/** Those that are laid over the first, by frame, as the sift compares; what is held is never reflected. */
function laidOverFirst(
  frames: readonly ShownFrame[],
  positions: ReadonlyMap<number, Float64Array>,
  around: { ensemble: EnsembleView; sift: SiftView | null; held: ReadonlySet<number> },
): ReadonlyMap<number, LaidOver> {
  const laid = new Map<number, LaidOver>();
  const first = frames[0];
  const under = first && positions.get(first.frame);
  if (!under || around.sift === null) return laid;
  const { atoms, symmetry, mirror } = around.sift.recipe;
  for (const { frame, laidOver } of frames) {
    const at = laidOver ? positions.get(frame) : undefined;
    if (!at) continue;
    const images = mirror === "merge" && !around.held.has(frame) && !around.held.has(first.frame);
    laid.set(frame, layOver(around.ensemble, { atoms, symmetry, mirror: images }, under, at));
  }
  return laid;
}
