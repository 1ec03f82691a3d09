import { renderToString } from "react-dom/server";
import { MemoryRouter } from "react-router";
import { describe, expect, it } from "vitest";
import type { SiftView } from "~/lib/views";
import { pentaneView } from "../../../tests/factories/ensemble-view.ts";
import { SectionState } from "./section-state";
import { WorkbenchProvider } from "./workbench-context";

const cancelled: SiftView = {
  id: "eeeeeeeeeeeeeeee",
  status: "cancelled",
  progress: 0.4,
  result: null,
  error: null,
  current: true,
  recipe: {
    version: 1,
    level: "aaaaaaaaaaaaaaaa",
    levelName: "MMFF94",
    window: null,
    energyTolerance: 0.15,
    rmsdTolerance: 0.31,
    atoms: "heavy+polarH",
    symmetry: true,
    mirror: "merge",
    chirality: "achiral",
    chiralityOverridden: false,
  },
  createdAt: "2026-12-01T12:00:00Z",
};

function shown(sift: SiftView, lastSet: string | null, asked?: { id: string | null; progress: number }) {
  const html = renderToString(
    <MemoryRouter
      initialEntries={["/ensembles/bbbbbbbbbbbbbbbb/populations?v=1&sift=eeeeeeeeeeeeeeee&T=310"]}
    >
      <WorkbenchProvider ensemble={pentaneView} sift={sift} lastSet={lastSet} first={1} section="populations">
        <SectionState asked={asked} />
      </WorkbenchProvider>
    </MemoryRouter>,
  );
  return html.replaceAll("<!-- -->", "").replaceAll("\u00a0", " ").replaceAll("&amp;", "&");
}

describe("a section whose sift came to nothing", () => {
  it.each([
    ["cancelled", "The sift was cancelled"],
    ["failed", "The sift failed"],
  ] as const)("%s: says with what it was asked, and leads back to the last set", (status, title) => {
    const html = shown({ ...cancelled, status }, "ffffffffffffffff");
    expect(html).toContain(title);
    expect(html).toContain("It was asked with MMFF94 energies");
    expect(html).toContain("RMSD tolerance 0.310 Å");
    // The address without the sift, with everything else.
    expect(html).toMatch(/href="\/ensembles\/b+\/populations\?v=1&T=310"[^>]*>Back to the last set/);
  });

  it("offers no way back where there is no other set", () => {
    expect(shown(cancelled, null)).not.toContain("Back to the last set");
  });

  it("speaks of the sift that was asked for instead, from the click on", () => {
    const html = shown(cancelled, "ffffffffffffffff", { id: null, progress: 0 });
    expect(html).toContain("Comparing 397 frames, 0 % done");
    expect(html).not.toContain("cancelled");
  });
});
