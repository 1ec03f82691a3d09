import { expect, it } from "vitest";
import { parseTheme, readThemeCookie, writeThemeCookie } from "./theme.ts";

it("follows the system unless light or dark was chosen", () => {
  expect(parseTheme("dark")).toBe("dark");
  for (const other of ["", "system", "Dark", null, undefined, 1]) expect(parseTheme(other)).toBeNull();
});

it("reads back what it wrote, beside other cookies", () => {
  for (const theme of ["light", "dark"] as const) {
    const [pair] = writeThemeCookie(theme).split(";");
    expect(readThemeCookie(`a=1; ${pair}; mytheme=light`)).toBe(theme);
  }
  expect(readThemeCookie(writeThemeCookie(null).split(";")[0] ?? "")).toBeNull();
  expect(readThemeCookie(null)).toBeNull();
  expect(readThemeCookie("theme=purple")).toBeNull();
});
