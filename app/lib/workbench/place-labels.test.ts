import { describe, expect, it } from "vitest";
import { placeNames } from "./place-labels.ts";

const area = { left: 0, right: 400, top: 0, bottom: 300 };

describe("placeNames", () => {
  it("puts a lone name right above its point", () => {
    expect(placeNames([{ name: "c1", x: 50, y: 100 }], area)).toEqual([
      { text: "c1", x: 58, y: 95, end: false },
    ]);
  });

  it("names points that lie on one another together", () => {
    const placed = placeNames(
      [
        { name: "c3", x: 100, y: 100 },
        { name: "c4", x: 104, y: 102 },
      ],
      area,
    );
    expect(placed.map((one) => one.text)).toEqual(["c3, c4"]);
  });

  it("lays no name over another name or a named point", () => {
    const points = [
      { name: "c1", x: 100, y: 100 },
      { name: "c2", x: 122, y: 96 },
      { name: "c3", x: 112, y: 84 },
      { name: "c4", x: 95, y: 117 },
    ];
    const placed = placeNames(points, area);
    const boxes = placed.map(({ text, x, y, end }) => {
      const from = end ? x - 7 * text.length : x;
      return { left: from, right: from + 7 * text.length, top: y - 10, bottom: y + 2 };
    });
    for (const [k, a] of boxes.entries()) {
      for (const { x, y } of points) {
        expect(x > a.left && x < a.right && y > a.top && y < a.bottom).toBe(false);
      }
      for (const b of boxes.slice(k + 1)) {
        expect(a.right > b.left && b.right > a.left && a.bottom > b.top && b.bottom > a.top).toBe(false);
      }
    }
    expect(placed.length).toBeGreaterThan(2);
  });

  it("turns to the left at the right edge, and gives up where nothing is free", () => {
    expect(placeNames([{ name: "c1", x: 395, y: 100 }], area)[0]?.end).toBe(true);
    expect(placeNames([{ name: "c1", x: 5, y: 5 }], { left: 0, right: 10, top: 0, bottom: 10 })).toEqual([]);
  });
});
