import { describe, expect, it } from "vitest";
import { makeMember, makeTeam, makeUser, PASSWORD } from "../factories/people";
import { call, cookieOf } from "../setup/app";

describe("signing in", () => {
  it("opens a session with the right password and leads to the teams", async () => {
    const team = await makeTeam("Delta");
    const user = await makeMember(team.id, "analyst");
    const answer = await call("/login", { form: { email: user.email, password: PASSWORD } });
    expect(answer.status).toBe(303);
    expect(answer.headers.get("location")).toBe("/teams");
    const cookie = cookieOf(answer);
    expect(cookie).not.toBeNull();
    const page = await call("/login", { cookie: cookie ?? "" });
    expect(page.status).toBe(302);
  });

  it("says the same of a wrong password and of an unknown address", async () => {
    const user = await makeUser();
    const wrong = await call("/login", { form: { email: user.email, password: "another one entirely" } });
    const unknown = await call("/login", {
      form: { email: "x@lab.example", password: "another one entirely" },
    });
    expect([wrong.status, unknown.status]).toEqual([422, 422]);
    expect(cookieOf(wrong)).toBeNull();
    const words = async (answer: Response) => /role="alert".*?<\/div>/s.exec(await answer.text())?.[0];
    const said = await words(wrong);
    expect(said).toContain("do not belong together");
    expect(await words(unknown)).toBe(said);
  });
});
