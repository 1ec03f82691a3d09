import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  isUnderWay,
  nextToStart,
  secondsLeft,
  type Taken,
  type Upload,
  type UploadAction,
  uploadList,
  uploadName,
  uploadWords,
} from "./upload-list.ts";

const MB = 2 ** 20;
const taken: Taken = {
  id: "abcdefghijklmnop",
  name: "Alanine",
  frames: 400,
  accepted: 397,
  remarked: 5,
  held: 3,
  questions: 0,
  already: false,
};
const refusal = { title: "Refused", detail: "The file has no frames.", faults: [], existing: null };

function play(...actions: UploadAction[]): readonly Upload[] {
  return actions.reduce<readonly Upload[]>(uploadList, []);
}
function only(list: readonly Upload[]): Upload {
  const [upload] = list;
  if (!upload || list.length > 1) throw new Error(`Expected one upload, found ${list.length}.`);
  return upload;
}
const add = (id: number, bytes = 23 * MB): UploadAction => ({ type: "add", id, names: [`${id}.xyz`], bytes });
const start = (id: number): UploadAction => ({ type: "start", id, now: 1000 });

describe("uploadList", () => {
  it("goes from waiting over sending and reading to done", () => {
    const waiting = play(add(1));
    expect(waiting[0]?.state).toBe("waiting");
    const sending = uploadList(uploadList(waiting, start(1)), {
      type: "progress",
      id: 1,
      sent: 14 * MB,
      now: 11_000,
    });
    expect(sending[0]?.state).toBe("sending");
    expect(uploadWords(only(sending))).toBe("14\u00a0MB of 23\u00a0MB, about 6\u00a0s left");
    const counted = uploadList(uploadList(sending, { type: "frames", id: 1, frames: 4312 }), {
      type: "frames",
      id: 1,
      frames: 4000,
    });
    expect(uploadWords(only(counted))).toBe(
      "14\u00a0MB of 23\u00a0MB, 4,312 frames read so far, about 6\u00a0s left",
    );
    const reading = uploadList(sending, { type: "progress", id: 1, sent: 23 * MB + 512, now: 20_000 });
    expect(reading[0]).toMatchObject({ state: "reading", sent: 23 * MB });
    const done = uploadList(reading, { type: "taken", id: 1, taken });
    expect(uploadWords(only(done))).toBe("400 frames read, 5 remarks, 3 held.");
  });

  it("never goes back once an upload has ended", () => {
    const ends: UploadAction[] = [
      { type: "cancel", id: 1 },
      { type: "failed", id: 1 },
      { type: "refused", id: 1, refusal },
      { type: "taken", id: 1, taken },
    ];
    for (const end of ends) {
      const ended = play(add(1), start(1), end);
      for (const late of ends) expect(uploadList(ended, late)).toEqual(ended);
      expect(uploadList(ended, { type: "progress", id: 1, sent: 5, now: 2000 })).toEqual(ended);
      expect(isUnderWay(ended)).toBe(false);
    }
  });

  it("sends a lost or cancelled one again from the beginning, a refused one never", () => {
    const lost = play(
      add(1),
      start(1),
      { type: "progress", id: 1, sent: 5, now: 2000 },
      { type: "failed", id: 1 },
    );
    expect(uploadList(lost, { type: "again", id: 1 })).toEqual(play(add(1)));
    const refused = play(add(1), start(1), { type: "refused", id: 1, refusal });
    expect(uploadList(refused, { type: "again", id: 1 })).toEqual(refused);
    expect(uploadWords(only(refused))).toBe("The file has no frames.");
  });

  it("puts away only what has ended", () => {
    expect(play(add(1), { type: "dismiss", id: 1 })).toHaveLength(1);
    expect(play(add(1), { type: "cancel", id: 1 }, { type: "dismiss", id: 1 })).toHaveLength(0);
  });

  it("starts in order and keeps to the number at once", () => {
    const two = play(add(1), add(2), add(3), start(1), start(2));
    expect(nextToStart(two, 2)).toBeNull();
    expect(nextToStart(uploadList(two, { type: "failed", id: 1 }), 2)?.id).toBe(3);
  });

  it("counts bytes upwards and never beyond the file, whatever the browser reports", () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 0, max: 2000 }), { maxLength: 20 }), (reports) => {
        let list = play(add(1, 1000), start(1));
        let before = 0;
        for (const [i, sent] of reports.entries()) {
          list = uploadList(list, { type: "progress", id: 1, sent, now: 1000 + i });
          const now = list[0]?.sent ?? -1;
          expect(now).toBeGreaterThanOrEqual(before);
          expect(now).toBeLessThanOrEqual(1000);
          before = now;
        }
      }),
      { seed: 815, numRuns: 100 },
    );
  });
});

describe("words", () => {
  it("name several files by the first", () => {
    expect(uploadName({ names: ["a.xyz"] })).toBe("a.xyz");
    expect(uploadName({ names: ["a.xyz", "b.xyz", "c.xyz"] })).toBe("a.xyz and 2 more");
  });

  it("estimate nothing in the first half second", () => {
    const list = play(add(1), start(1), { type: "progress", id: 1, sent: MB, now: 1400 });
    expect(secondsLeft(only(list))).toBeNull();
  });

  it("put the open questions first, since until the answer all frames wait", () => {
    const list = play(add(1), start(1), {
      type: "taken",
      id: 1,
      taken: { ...taken, held: 400, questions: 2 },
    });
    expect(uploadWords(only(list))).toBe("400 frames read. 2 questions first; nothing is computed before.");
  });

  it("say that the same bytes are here already", () => {
    const list = play(add(1), start(1), { type: "taken", id: 1, taken: { ...taken, already: true } });
    expect(uploadWords(only(list))).toBe("Already here as Alanine: the same bytes make no second ensemble.");
  });
});
