import { useEffect, useRef, useState } from "react";
import { Button } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { failureWords } from "~/hooks/failure-words";
import { countKept } from "~/hooks/use-sift";
import { capital, countWord, fixed, formatCount, formatEnergy, formatRmsd, withUnit } from "~/lib/format";
import type { SiftRecipe } from "~/lib/recipe/recipe";
import { farthestMerged } from "~/lib/workbench/findings";
import { requestOf } from "~/lib/workbench/recipe-words";
import { MAX_PAIRED, useWorkbench } from "./workbench-context";

/** The kept conformers that lie nearest to each other, and the farthest frame that was merged: where a tolerance would cut. */
export function NearestPairs() {
  const { nearPairs, rows, result, show, sift } = useWorkbench();
  if (result === null || rows.length < 2) return null;
  const merged = farthestMerged(result);
  const nearest = nearPairs?.[0];
  const byEnergy = nearPairs?.filter((pair) => pair.rmsd <= (sift?.recipe.rmsdTolerance ?? 0)).length ?? 0;
  const apart = (a: number, b: number) => {
    const x = rows[a]?.relativeEnergy;
    const y = rows[b]?.relativeEnergy;
    return x === null || x === undefined || y === null || y === undefined ? null : Math.abs(x - y);
  };
  return (
    <div className="min-w-0">
      <BlockHead title="Pairs nearest to the cut" />
      {nearPairs === null ? (
        <p className="appear-late text-ink-2" role="status">
          {rows.length > MAX_PAIRED
            ? `Not looked for among more than ${formatCount(MAX_PAIRED)} conformers.`
            : "Comparing the kept conformers with each other."}
        </p>
      ) : (
        <Table aria-label="Pairs of conformers nearest to the cut">
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
            {nearPairs.map(({ a, b, rmsd, exact }) => (
              <Tr key={`${a} ${b}`}>
                <Td>
                  <TextButton
                    className="inline-flex min-h-6 items-center text-ink no-underline hover:underline"
                    onClick={() => show([rows[a]?.frame ?? 0, rows[b]?.frame ?? 0])}
                  >
                    {rows[a]?.name} and {rows[b]?.name}
                  </TextButton>
                </Td>
                <Td align="right">
                  {exact ? "" : "to "}
                  {formatRmsd(rmsd)}
                </Td>
                <Td align="right">{formatEnergy(apart(a, b))}</Td>
              </Tr>
            ))}
          </tbody>
        </Table>
      )}
      <p className="mt-2 text-xs text-ink-3">
        All kept apart.{" "}
        {merged === null
          ? "Nothing was merged."
          : `The farthest merged frame lies ${merged.rmsd < 0.001 ? "" : "at "}${withUnit(formatRmsd(merged.rmsd), "Å")} (frame ${merged.frame} with frame ${merged.repeats}).`}
        {byEnergy > 0
          ? ` ${byEnergy === 1 ? "One pair above lies" : `${capital(countWord(byEnergy))} pairs above lie`} within the RMSD tolerance and ${byEnergy === 1 ? "is" : "are"} kept apart by energy alone.`
          : ""}
        {nearest && merged && nearest.rmsd > merged.rmsd
          ? ` Nothing stands between that and ${withUnit(formatRmsd(nearest.rmsd), "Å")}.`
          : ""}
      </p>
    </div>
  );
}

interface Count {
  tolerance: number;
  kept: number | null;
  id: string | null;
}

/** How the count hangs on the tolerance: the same recipe at half and at double, computed when asked for. */
export function AroundTolerance({ recipe }: { recipe: SiftRecipe }) {
  const { ensemble, rows, sift, change } = useWorkbench();
  const [counts, setCounts] = useState<{ half: Count; double: Count } | null>(null);
  const [busy, setBusy] = useState(false);
  const [error, setError] = useState<string | null>(null);
  const abort = useRef<AbortController | null>(null);
  // biome-ignore lint/correctness/useExhaustiveDependencies: another sift has other neighbours
  useEffect(() => {
    setCounts(null);
    setError(null);
    setBusy(false);
    return () => abort.current?.abort();
  }, [sift?.id]);
  const at = recipe.rmsdTolerance;
  const compute = async () => {
    const control = new AbortController();
    abort.current = control;
    setBusy(true);
    setError(null);
    const ask = (tolerance: number) =>
      countKept(ensemble.id, { ...requestOf(recipe), rmsdTolerance: tolerance }, control.signal);
    try {
      const [half, double] = await Promise.all([ask(at / 2), ask(2 * at)]);
      setCounts({ half: { tolerance: at / 2, ...half }, double: { tolerance: 2 * at, ...double } });
    } catch (caught) {
      if (!control.signal.aborted) setError(failureWords(caught));
    }
    if (!control.signal.aborted) setBusy(false);
  };
  const lines: Count[] = [
    counts?.half ?? { tolerance: at / 2, kept: null, id: null },
    { tolerance: at, kept: rows.length, id: null },
    counts?.double ?? { tolerance: 2 * at, kept: null, id: null },
  ];
  const steady = counts !== null && counts.half.kept === rows.length && counts.double.kept === rows.length;
  return (
    <div className="min-w-0">
      <BlockHead title="How the count hangs on the tolerance" />
      <Table aria-label="Conformers kept at half, one and two times the RMSD tolerance">
        <thead>
          <tr>
            <Th align="right" unit="Å">
              RMSD tolerance
            </Th>
            <Th align="right">Conformers kept</Th>
            <Th>
              <span className="sr-only">Take</span>
            </Th>
          </tr>
        </thead>
        <tbody>
          {lines.map((line, k) => (
            <Tr key={line.tolerance} selected={k === 1}>
              <Td align="right">{fixed(line.tolerance, 3)}</Td>
              <Td align="right">{formatCount(line.kept)}</Td>
              <Td align="right">
                {line.id !== null && ensemble.mayCompute ? (
                  <TextButton onClick={() => change({ sift: line.id })}>
                    Take<span className="sr-only"> {fixed(line.tolerance, 3)} Å</span>
                  </TextButton>
                ) : k === 1 ? (
                  <span className="text-ink-3">shown</span>
                ) : null}
              </Td>
            </Tr>
          ))}
        </tbody>
      </Table>
      <div className="mt-2 text-xs text-ink-3" role="status">
        {error ? <p className="text-danger">{error}</p> : null}
        {counts !== null ? (
          <p>
            {steady
              ? `The count stays at ${formatCount(rows.length)}: it does not hang on the choice.`
              : "The count moves with the tolerance: look at the nearest pairs before you rely on it."}
          </p>
        ) : ensemble.mayCompute && at > 0 ? (
          <Button size="sm" onClick={compute} disabled={busy} aria-busy={busy}>
            {busy ? "Comparing" : "Count at half and double"}
          </Button>
        ) : null}
      </div>
    </div>
  );
}
