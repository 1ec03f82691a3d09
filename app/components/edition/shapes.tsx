import { useMemo, useState } from "react";
import { Checkbox } from "~/components/ui/checkbox";
import { Still } from "~/components/viewer/still";
import { PopulationBar } from "~/components/workbench/population-bar";
import { layOutShapes } from "~/lib/edition/shape-layout";
import { extentWords } from "~/lib/edition/summary";
import type { EditionView } from "~/lib/edition/views";
import { capital, countWord, formatDistance, formatEnergy, formatPercent, withUnit } from "~/lib/format";
import type { HydrogenMode } from "~/lib/url-state";
import { homeCamera } from "~/lib/view/camera";
import { viewMarks } from "~/lib/view/marks";
import type { Scene } from "~/lib/view/scene";
import { EditionHead } from "./edition-head";

const WIDTH = 264;
const HEIGHT = 184;

/** The most populated shapes side by side, each from its broad side and all at one scale: flat pictures, no script needed. */
export function Shapes({ edition }: { edition: EditionView }) {
  const [all, setAll] = useState(false);
  const pictures = usePictures(edition, all ? "all" : "polar");
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
      <div className="mt-1 flex flex-wrap items-center justify-between gap-x-6 gap-y-1">
        <p className="text-ink-2">
          {count === 1 ? "Seen from its broad side" : "Each from its broad side, all at one scale"};{" "}
          {all ? "all hydrogens." : "hydrogens on N, O, S and P only."}
        </p>
        <div className="with-script print:hidden">
          <Checkbox checked={all} onChange={(event) => setAll(event.target.checked)}>
            Hydrogens on carbon
          </Checkbox>
        </div>
      </div>
      <ul className="mt-3 grid grid-cols-2 gap-x-6 gap-y-6 md:grid-cols-4 print:grid-cols-4 print:gap-x-4 max-sm:gap-x-3">
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

function usePictures(edition: EditionView, hydrogens: HydrogenMode) {
  return useMemo(() => {
    const shapes = edition.shapes.flatMap(({ row, positions }) => {
      const found = edition.rows[row];
      return found ? [{ ...found, positions: Float64Array.from(positions) }] : [];
    });
    const laid = layOutShapes(edition.ensemble, shapes, WIDTH, HEIGHT, hydrogens);
    if (laid === null) return null;
    return laid.figures.flatMap(({ figure, rotation, stage }) => {
      const at = edition.rows.findIndex(({ frame }) => frame === figure.frame);
      const row = edition.rows[at];
      if (!row) return [];
      const scene: Scene = { ...laid.scene, mode: "one", strong: [figure], faint: [] };
      const camera = homeCamera(rotation);
      const marks = viewMarks({
        ...{ scene, stage, camera },
        picked: [],
        pickText: null,
        numbers: false,
        bar: false,
      });
      return [{ row, name: row.name, scene, stage, camera, marks, extent: edition.extents[at] ?? 0 }];
    });
  }, [edition, hydrogens]);
}
