import { type ReactNode, useMemo } from "react";
import { BlockHead } from "~/components/ui/finding";
import { ProgressBar } from "~/components/ui/progress-bar";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import type { NearnessAnswer } from "~/hooks/whole-ensemble-protocol";
import type { NearPair } from "~/lib/align/nearness";
import { formatEnergy, formatRmsd, plural, rmsdsBeside, withUnit } from "~/lib/format";
import { farthestRepeats, nearestOthers } from "~/lib/workbench/nearness";
import { useWorkbench } from "./workbench-context";

const SHOWN = 4;

/** What a tolerance just merges and what it just keeps apart, for the eye to judge: each pair is laid over in the view. */
export function NearestPairs({
  nearness,
  progress,
}: {
  nearness: NearnessAnswer | null;
  progress: { done: number; of: number } | null;
}) {
  const { rows, result, sift, roles } = useWorkbench();
  const under = useMemo(() => (result === null ? [] : farthestRepeats(result, SHOWN)), [result]);
  const over = useMemo(() => (nearness?.over ?? []).slice(0, SHOWN).reverse(), [nearness]);
  const rmsdText = useMemo(
    () =>
      rmsdsBeside(
        [...over, ...under].map(({ rmsd }) => rmsd),
        sift?.recipe.rmsdTolerance ?? 0,
      ),
    [over, under, sift?.recipe.rmsdTolerance],
  );
  if (result === null || sift === null || rows.length < 2) return null;
  const apart = ({ a, b }: NearPair) => {
    const [x, y] = [rows[a]?.relativeEnergy, rows[b]?.relativeEnergy];
    return x === null || x === undefined || y === null || y === undefined ? null : Math.abs(x - y);
  };
  const name = (frame: number) => {
    const role = roles.get(frame);
    return role?.kind === "kept" ? role.name : `frame ${frame}`;
  };
  return (
    <div className="min-w-0 break-inside-avoid">
      <BlockHead title="Pairs nearest to the cut" />
      <Table aria-label="Pairs nearest to the cut: kept apart above it, merged below it">
        <thead>
          <tr>
            <Th>Pair</Th>
            <Th align="right" unit="Å">
              RMSD
            </Th>
            <Th align="right" unit="kcal/mol">
              Energy apart
            </Th>
          </tr>
        </thead>
        <tbody>
          {over.map((pair) => (
            <PairRow
              key={`${pair.a} ${pair.b}`}
              frames={[rows[pair.a]?.frame ?? 0, rows[pair.b]?.frame ?? 0]}
              rmsd={rmsdText(pair.rmsd)}
              exact={pair.exact}
              energy={apart(pair)}
            >
              {rows[pair.a]?.name} and {rows[pair.b]?.name}
            </PairRow>
          ))}
          <tr>
            <td colSpan={3} className="border-b border-b-mark px-3 py-1 text-xs text-mark max-sm:px-2">
              kept apart above, merged below {withUnit(formatRmsd(sift.recipe.rmsdTolerance), "Å")}
            </td>
          </tr>
          {under.map(({ frame, repeats, rmsd, energyDifference }) => (
            <PairRow
              key={frame}
              frames={[repeats, frame]}
              rmsd={rmsdText(rmsd)}
              exact
              energy={energyDifference}
            >
              {name(repeats)} and frame {frame}
            </PairRow>
          ))}
        </tbody>
      </Table>
      {nearness === null ? <Searching progress={progress} /> : null}
      <p className="mt-2 text-xs text-ink-3">
        {under.length === 0 ? "Nothing was merged. " : ""}
        {nearness !== null && nearness.within > 0
          ? `${plural(nearness.within, "pair")} of conformers ${nearness.within === 1 ? "lies" : "lie"} within the RMSD tolerance and ${nearness.within === 1 ? "is" : "are"} kept apart by energy alone. `
          : ""}
        A pair is laid over in the view by its name.
      </p>
    </div>
  );
}

function PairRow({
  frames,
  rmsd,
  exact,
  energy,
  children,
}: {
  frames: [first: number, second: number];
  /** As its column writes it. */
  rmsd: string;
  exact: boolean;
  energy: number | null;
  children: ReactNode;
}) {
  const { layOver, selected } = useWorkbench();
  const shown = selected.length === 2 && frames.every((frame) => selected.includes(frame));
  return (
    <Tr selected={shown}>
      <Td className="max-[24rem]:whitespace-normal">
        <TextButton
          printed
          className="inline-flex min-h-6 items-center text-ink no-underline hover:underline"
          onClick={() => layOver(...frames)}
        >
          {children}
        </TextButton>
      </Td>
      <Td align="right">
        {exact ? "" : "to "}
        {rmsd}
      </Td>
      <Td align="right">{formatEnergy(energy)}</Td>
    </Tr>
  );
}

function Searching({ progress }: { progress: { done: number; of: number } | null }) {
  return (
    <div className="appear-late mt-2 flex items-center gap-4 text-xs text-ink-2" role="status">
      <span className="whitespace-nowrap">Comparing the kept conformers with each other</span>
      <span className="flex-1">
        <ProgressBar
          share={progress === null ? null : progress.done / Math.max(1, progress.of)}
          label="Nearest conformers"
        />
      </span>
    </div>
  );
}

/** The conformers nearest to the one that is selected. */
export function NearestToSelected() {
  const { rows, column, reference, layOver } = useWorkbench();
  if (reference === null || rows.length < 2) return null;
  const ready = column !== null && column.reference === reference.index && column.known >= column.rmsd.length;
  const others = ready ? nearestOthers(column.rmsd, column.reference, 5) : [];
  return (
    <div className="min-w-0">
      <BlockHead title={`Nearest to ${reference.name}`} />
      {ready ? (
        <Table aria-label={`Conformers nearest to ${reference.name}`}>
          <thead>
            <tr>
              <Th>Conformer</Th>
              <Th align="right" unit="Å">
                RMSD
              </Th>
              <Th align="right" unit="kcal/mol">
                Relative energy
              </Th>
            </tr>
          </thead>
          <tbody>
            {others.map(({ index, rmsd }) => {
              const row = rows[index];
              return row ? (
                <Tr key={index}>
                  <Td className="max-[24rem]:whitespace-normal">
                    <TextButton
                      printed
                      className="inline-flex min-h-6 items-center text-ink no-underline hover:underline"
                      onClick={() => layOver(reference.frame, row.frame)}
                    >
                      {row.name}
                      <span className="sr-only"> laid over {reference.name}</span>
                    </TextButton>
                  </Td>
                  <Td align="right">
                    {column?.exact[index] === 0 ? "to " : ""}
                    {formatRmsd(rmsd)}
                  </Td>
                  <Td align="right">{formatEnergy(row.relativeEnergy)}</Td>
                </Tr>
              ) : null;
            })}
          </tbody>
        </Table>
      ) : (
        <p className="appear-late text-ink-2" role="status">
          Comparing all conformers with {reference.name}.
        </p>
      )}
      <p className="mt-2 text-xs text-ink-3">
        Select another conformer in the table below to see what lies near it.
      </p>
    </div>
  );
}
