import { describe, expect, it } from "vitest";
import { ShapeStore } from "./shape-store.ts";

describe("store of kept shapes", () => {
  it("gives every shape back where it says, over many chunks", () => {
    const store = new ShapeStore(3);
    for (let k = 0; k < 1000; k++) store.push(Float64Array.of(k, 2 * k, -k));
    for (const k of [0, 1, 127, 128, 999]) {
      const at = store.offsetOf(k);
      expect([...store.arrayOf(k).subarray(at, at + 3)]).toEqual([k, 2 * k, -k]);
    }
  });

  it("keeps what was not released", () => {
    const store = new ShapeStore(1);
    for (let k = 0; k < 600; k++) store.push(Float64Array.of(k));
    store.release(300);
    store.release(200);
    for (let k = 300; k < 600; k++) expect(store.arrayOf(k)[store.offsetOf(k)]).toBe(k);
  });

  it("can be filled further after a release", () => {
    const store = new ShapeStore(1);
    for (let k = 0; k < 100; k++) store.push(Float64Array.of(k));
    store.release(100);
    store.push(Float64Array.of(100));
    expect(store.arrayOf(100)[store.offsetOf(100)]).toBe(100);
  });
});
