import { expect, it } from "vitest";
import { initials } from "./account-menu.tsx";

it("takes two letters from whatever a person calls themselves", () => {
  expect(initials("Demo analyst")).toBe("DA");
  expect(initials("Night shift two")).toBe("NT");
  expect(initials("nmr")).toBe("NM");
  expect(initials("  ")).toBe("?");
  expect(initials("Émile Ζorn")).toBe("ÉΖ");
});
