import { describe, expect, it } from "vitest";
import { logbookEntrySchema } from "./entries.ts";
import { hidesSomething, NO_FILTER, readFilter, shownSince } from "./filter.ts";
import { kindOf, LOGBOOK_KINDS } from "./kinds.ts";

describe("kinds of entries", () => {
  it.each([
    ["sign-in-failed", "sign-in"],
    ["link-days-set", "people"],
    ["link-opened", "link"],
    ["link-exported", "export"],
    ["edition-verified", "edition"],
    ["edition-exported", "export"],
    ["release-refused", "held"],
    ["sift", "recipe"],
    ["remark", "remark"],
    ["restored", "ensemble"],
  ])("%s is about %s", (type, kind) => expect(kindOf(type)).toBe(kind));

  it("has entries of every kind", () => {
    const types = logbookEntrySchema.options.map((option) => option.shape.type.value);
    expect(new Set(types.map(kindOf))).toEqual(new Set(LOGBOOK_KINDS));
  });
});

describe("the filter in the address", () => {
  it("is read as written, and hides nothing where it cannot be read", () => {
    const read = readFilter(new URLSearchParams("kind=link&who=token&when=week&text=%20a%20&before=12"));
    expect(read).toEqual({ kind: "link", who: "token", when: "week", text: "a", before: 12 });
    expect(readFilter(new URLSearchParams("kind=%27&who=x%27&when=1&before=-1"))).toEqual(NO_FILTER);
    expect(hidesSomething(NO_FILTER)).toBe(false);
    expect(hidesSomething({ ...NO_FILTER, before: 3 })).toBe(false);
    expect(hidesSomething(read)).toBe(true);
  });

  it("counts days in UTC", () => {
    const now = new Date("2026-12-01T00:30:00Z");
    expect(shownSince("today", now)?.toISOString()).toBe("2026-12-01T00:00:00.000Z");
    expect(shownSince("week", now)?.toISOString()).toBe("2026-11-25T00:00:00.000Z");
    expect(shownSince("all", now)).toBeNull();
  });
});
