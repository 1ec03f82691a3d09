import { describe, expect, it } from "vitest";
import { buildScene, type SceneInput } from "./scene.ts";
import { pickWords, sceneWords } from "./words.ts";

const caption = { strong: "Overlay", rest: "of 3, aligned on heavy atoms" };
const input: SceneInput = {
  elements: [6, 8, 1],
  bonds: [0, 1, 1, 2],
  conformers: [11, 12, 13].map((frame, k) => ({
    frame,
    name: `c${k + 1}`,
    positions: Float64Array.of(0, 0, 0, 1.4, 0, 0, 1.8, 0.9, 0),
    population: 0.285,
    selected: k === 0,
  })),
  alignOn: null,
  hydrogens: "polar",
  mode: "overlay",
};

describe("sceneWords", () => {
  it("says what stands in colours and what around it", () => {
    expect(sceneWords(buildScene(input), caption)).toBe(
      "Overlay of 3, aligned on heavy atoms. c1 (frame 11, 28.5\u00a0%) in atom colours, 2 others as lines tinted by population.",
    );
  });

  it("counts the selected ones that found no room in colours", () => {
    const conformers = Array.from({ length: 7 }, (_, k) => ({
      ...input.conformers[0]!,
      positions: Float64Array.from(input.conformers[0]!.positions),
      frame: k + 1,
      selected: k < 6,
    }));
    expect(sceneWords(buildScene({ ...input, conformers }), caption)).toContain(
      "3 others as lines tinted by population (2 of them selected).",
    );
    expect(sceneWords(buildScene({ ...input, conformers, mode: "side" }), caption)).toContain(
      "side by side; 2 more selected, not drawn.",
    );
  });

  it("says what changed in a held structure", () => {
    const held = {
      frame: 233,
      positions: Float64Array.of(0, 0, 0, 1.4, 0, 0, -0.9, 0.4, 0),
      population: null,
      selected: true,
      bonds: [0, 1, 0, 2],
      tone: "held" as const,
    };
    expect(
      sceneWords(buildScene({ ...input, conformers: [held] }), { strong: "Frame 233", rest: "held" }),
    ).toBe("Frame 233 held. frame 233 (held) in atom colours. In frame 233: H3 now on C1.");
  });

  it("says that nothing is shown", () => {
    expect(sceneWords(buildScene({ ...input, conformers: [] }), { strong: "Nothing chosen", rest: "" })).toBe(
      "Nothing chosen. No conformer is shown.",
    );
  });
});

describe("pickWords", () => {
  it("names the measure, else says what to do", () => {
    expect(pickWords([2, 3, 4, 5], ["C3\u2013C4\u2013N5\u2013S6 \u2212154°"])).toBe(
      "Torsion C3\u2013C4\u2013N5\u2013S6 \u2212154°.",
    );
    expect(pickWords([2, 3, 4, 5], ["C3\u2013C4\u2013N5\u2013S6 \u2212154°"], "C4\u2013N5")).toBe(
      "C3\u2013C4\u2013N5\u2013S6 \u2212154°. C4\u2013N5 not bonded: an angle between planes, no torsion of a bond.",
    );
    expect(pickWords([2], ["C3"])).toBe("C3 picked: pick a second one for a distance.");
    expect(pickWords([], [])).toBe("Click two, three or four atoms to measure.");
  });
});
