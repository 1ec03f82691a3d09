import { renderToString } from "react-dom/server";
import { describe, expect, it } from "vitest";
import type { ViewConformer } from "~/lib/view/scene";
import { PicksList } from "./picks-list";
import { MOST_FAINT_IN_STILL, StillPicture } from "./still";
import { Viewer, type ViewerProps } from "./viewer";

/** C1, C2, N3, S4 in a flat zigzag, H5 on N3. */
const elements = [6, 6, 7, 16, 1];
const bonds = [0, 1, 1, 2, 2, 3, 2, 4];
const zigzag = [-2, 0.5, 0, -0.7, -0.4, 0, 0.7, 0.4, 0, 2, -0.5, 0, 0.7, 1.4, 0];

function conformers(count: number): ViewConformer[] {
  return Array.from({ length: count }, (_, k) => ({
    frame: k + 1,
    name: `c${k + 1}`,
    positions: Float64Array.from(zigzag, (value, i) => value + (i % 3 === 2 ? 0.02 * k * i : 0)),
    population: 0.9 / (k + 1) ** 2,
    selected: k === 0,
  }));
}

function props(change: Partial<ViewerProps> = {}): ViewerProps {
  const ignore = () => undefined;
  return {
    elements,
    bonds,
    conformers: conformers(3),
    anchor: Float64Array.from(zigzag),
    alignOn: null,
    picked: [0, 1, 2, 3],
    onPick: ignore,
    hydrogens: "polar",
    mode: "overlay",
    onMode: ignore,
    onHydrogens: ignore,
    caption: { strong: "Overlay", rest: "of 3" },
    measures: [],
    ...change,
  };
}

describe("Viewer on the server", () => {
  it("draws the picture, its words, the measure and every control", () => {
    const html = renderToString(<Viewer {...props()} />);
    expect(html).toContain('stroke="var(--color-depth-5)"');
    expect(html).toContain("C1–C2–N3–S4 180°");
    expect(html).toContain(
      "c1 (frame 1, 90.0\u00a0%) in atom colours, 2 others as lines tinted by population",
    );
    for (const label of [
      "Reset view",
      "Atom numbers",
      "Save picture",
      "Atoms to measure",
      "Side by side",
      "All H",
    ]) {
      expect(html).toContain(label);
    }
  });

  it("writes no style into the markup, which the page's policy forbids", () => {
    expect(renderToString(<Viewer {...props()} />)).not.toContain(' style="');
  });

  it("stands empty while nothing has arrived", () => {
    const html = renderToString(<Viewer {...props({ conformers: [], picked: [] })} />);
    expect(html).toContain("No conformer is shown");
    expect(html).not.toContain("5\u00a0Å");
  });

  it("stays small however many conformers there are: the weakest are left out of the still picture", () => {
    const html = renderToString(<Viewer {...props({ conformers: conformers(400) })} />);
    const lines = html.match(/<path d="[^"]+" fill="none"/g) ?? [];
    expect(lines).toHaveLength(MOST_FAINT_IN_STILL);
  });
});

describe("StillPicture", () => {
  const picture = (change: { mode?: "overlay" | "side"; bar?: boolean } = {}) =>
    renderToString(
      <StillPicture
        {...{
          elements,
          bonds,
          conformers: conformers(4),
          alignOn: null,
          hydrogens: "polar",
          mode: "overlay",
          ...change,
        }}
        width={160}
        height={112}
        label="c1 of 4"
      />,
    );

  it("is named, sized by its box, and paints atoms in their colours", () => {
    const html = picture();
    expect(html).toContain('viewBox="0 0 160 112"');
    expect(html).toContain('role="img" aria-label="c1 of 4"');
    expect(html).toContain("var(--color-atom-s)");
    expect(html).toContain("var(--color-atom-n)");
  });

  it("leaves the bar out where asked", () => {
    expect(picture()).toContain("Å</text>");
    expect(picture({ bar: false })).not.toContain("Å</text>");
  });
});

describe("PicksList", () => {
  it("shows frame, measure and population of each, and what is held", () => {
    const html = renderToString(
      <PicksList
        picks={[
          { frame: 11, name: "c1", population: 0.285, measure: "−154°" },
          { frame: 233, population: null, measure: null, held: true },
        ]}
        measureLabel="C3–C4–N5–S6"
        facts={[{ label: "N5–S6 bond", text: "1.68 Å" }]}
      />,
    );
    const text = html.replace(/<[^>]+>/g, " ").replace(/\s+/g, " ");
    expect(text).toContain("2 selected");
    expect(text).toContain("c1 frame 11");
    expect(text).toContain("−154° 28.5 %");
    expect(text).toContain("frame 233 , held");
    expect(text).toContain("N5–S6 bond 1.68 Å");
  });

  it("shows eight and counts the rest", () => {
    const picks = Array.from({ length: 11 }, (_, k) => ({ frame: k + 1, population: 0.01, measure: null }));
    const html = renderToString(<PicksList picks={picks} measureLabel={null} />);
    expect(html.match(/<li/g)).toHaveLength(9);
    expect(html.replace(/<!-- -->/g, "")).toContain("and 3 more");
  });
});
