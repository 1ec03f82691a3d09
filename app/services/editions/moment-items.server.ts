import type { OpenItem } from "../../lib/edition/content.ts";
import { type FoundSift, findSiftsOf } from "../sifts/find-sift.server.ts";

/** What only this moment tells: whether another sift was asked for after the one that is frozen. */
export async function momentItems(sift: FoundSift): Promise<OpenItem[]> {
  const newest = (await findSiftsOf([sift.ensembleId]))[0];
  if (newest === undefined || newest.id === sift.id) return [];
  const section = "distinct-set";
  if (newest.status === "queued" || newest.status === "running") {
    return [
      {
        code: "sift-under-way",
        title: "A sift with other settings is under way.",
        text: "This edition holds the one before it.",
        section,
      },
    ];
  }
  if (newest.status !== "done") return [];
  return [
    {
      code: "newer-sift",
      title: "The settings were changed after this sift.",
      text: "A sift with other settings was asked for later; this edition does not hold it.",
      section,
    },
  ];
}
