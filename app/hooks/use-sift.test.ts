import { describe, expect, it } from "vitest";
import { untilAnswered } from "./use-sift";

const noPause = () => Promise.resolve();

/** Answers of a server, one a call; an error is thrown. */
function answering(...answers: unknown[]) {
  let call = 0;
  return async () => {
    const answer = answers[call++];
    if (answer instanceof Error) throw answer;
    return answer;
  };
}

describe("a question to a server that is away", () => {
  it("is asked again until there is an answer, and says meanwhile that there is none", async () => {
    const heard: boolean[] = [];
    const call = answering(new TypeError("Failed to fetch"), new TypeError("Failed to fetch"), "here");
    const answer = await untilAnswered(
      call,
      () => true,
      (silent) => heard.push(silent),
      noPause,
    );
    expect([answer, heard]).toEqual(["here", [true, true, false]]);
  });

  it("ends with what the server refuses", async () => {
    const call = answering(new TypeError("Failed to fetch"), new Error("The tolerance is below 0."));
    await expect(
      untilAnswered(
        call,
        () => true,
        () => {},
        noPause,
      ),
    ).rejects.toThrow("below 0");
  });

  it("is given up once nobody wants it, and says nothing more", async () => {
    let wanted = true;
    const heard: boolean[] = [];
    const call = async () => {
      wanted = false;
      throw new TypeError("Failed to fetch");
    };
    const answer = await untilAnswered(
      call,
      () => wanted,
      (silent) => heard.push(silent),
      noPause,
    );
    expect([answer, heard]).toEqual([null, []]);
  });
});
