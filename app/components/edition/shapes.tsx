import { useMemo } from "react";
import { Still } from "~/components/viewer/still";
import { PopulationBar } from "~/components/workbench/population-bar";
import { extentWords } from "~/lib/edition/summary";
import type { EditionView } from "~/lib/edition/views";
import { capital, countWord, formatDistance, formatEnergy, formatPercent, withUnit } from "~/lib/format";
import { homeCamera } from "~/lib/view/camera";
import { viewMarks } from "~/lib/view/marks";
import { buildScene, type Scene } from "~/lib/view/scene";
import { homeRotation, stageOf } from "~/lib/view/stage";
import { EditionHead } from "./edition-head";

const WIDTH = 264;
const HEIGHT = 184;

/** The most populated shapes side by side, laid over the first and drawn at one scale: flat pictures, no script needed. */
export function Shapes({ edition }: { edition: EditionView }) {
  const pictures = usePictures(edition);
  const widest = Math.max(...edition.rows.map((row) => row.population ?? 0), 0);
  if (pictures === null) return null;
  const count = pictures.length;
  const populated = edition.temperature !== null;
  return (
    <section className="mt-10" aria-labelledby="edition-shapes">
      <EditionHead id="edition-shapes">
        {count === 1
          ? populated
            ? "The most populated shape"
            : "The first shape"
          : `The ${countWord(count)} ${populated ? "most populated" : "first"} shapes`}
      </EditionHead>
      <p className="mt-1 text-ink-2">
        Heavy atoms laid over {pictures[0]?.name ?? "the first"}, all at one scale; hydrogens on N, O, S and P
        only.
      </p>
      <ul className="mt-3 grid grid-cols-2 gap-x-6 gap-y-6 md:grid-cols-4 print:grid-cols-4 max-sm:gap-x-3">
        {pictures.map(({ row, name, scene, stage, camera, marks, extent }) => (
          <li key={name} className="keep min-w-0">
            <div className="overflow-hidden rounded-md border border-rule-2 bg-view">
              <Still
                scene={scene}
                stage={stage}
                camera={camera}
                marks={marks}
                label={`${name}, ${extentWords(extent, edition.extents)}, ${formatDistance(extent)} Å from end to end`}
              />
            </div>
            <p className="mt-2 flex items-baseline justify-between text-base font-semibold">
              <span>{name}</span>
              {row.population === null ? null : (
                <span className="figures">{formatPercent(row.population, 1)}</span>
              )}
            </p>
            {row.population === null ? null : <PopulationBar population={row.population} widest={widest} />}
            <p className="mt-1">{capital(extentWords(extent, edition.extents))}</p>
            <p className="figures text-xs text-ink-3">
              {withUnit(formatDistance(extent), "Å")} from end to end
              {row.relativeEnergy === null
                ? ""
                : `, ${withUnit(formatEnergy(row.relativeEnergy), "kcal/mol")}`}
            </p>
          </li>
        ))}
      </ul>
    </section>
  );
}

/** One scene for all, so that they lie over each other; then a picture of each from the same camera. */
function usePictures(edition: EditionView) {
  return useMemo(() => {
    const { elements, bonds } = edition.ensemble;
    const conformers = edition.shapes.flatMap(({ row, positions }) => {
      const found = edition.rows[row];
      if (!found) return [];
      const { frame, name, population } = found;
      return [{ frame, name, population, positions: Float64Array.from(positions), selected: true }];
    });
    const first = conformers[0];
    if (!first) return null;
    const all = buildScene({
      elements,
      bonds,
      conformers,
      alignOn: null,
      hydrogens: "polar",
      mode: "overlay",
    });
    const rotation = homeRotation(elements, bonds, all.strong[0]?.positions ?? null);
    const stage = stageOf(all, rotation, WIDTH, HEIGHT, "bare");
    const camera = homeCamera(rotation);
    return all.strong.flatMap((figure) => {
      const at = edition.rows.findIndex(({ frame }) => frame === figure.frame);
      const row = edition.rows[at];
      if (!row) return [];
      const scene: Scene = { ...all, mode: "one", strong: [figure], faint: [] };
      const marks = viewMarks({
        scene,
        stage,
        camera,
        picked: [],
        pickText: null,
        numbers: false,
        bar: false,
      });
      return [{ row, name: row.name, scene, stage, camera, marks, extent: edition.extents[at] ?? 0 }];
    });
  }, [edition]);
}
