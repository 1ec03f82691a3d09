import { capital, formatDate, plural, pluralWord } from "./format.ts";

/** What each role may, in the words of the people page and of invitations. */
export const ROLE_WORDS = {
  reader: "sees all of the team, changes nothing, may write remarks",
  analyst: "takes in files, computes, freezes and shares",
  owner: "everything, people and deletion too",
} as const;

/**
 * The finding of the people page.
 *
 * @example peopleFinding({ members: [{}], invitations: [], tokens: 0 }) // "One person sees this team's work."
 */
export function peopleFinding(people: {
  members: readonly unknown[];
  invitations: readonly { endsAt: string }[];
  tokens: number;
}): string {
  const { members, invitations, tokens } = people;
  const persons =
    members.length === 1 ? "One person" : `${capital(pluralWord(members.length, "person", "people"))}`;
  const withTokens = tokens === 0 ? "" : ` and ${pluralWord(tokens, "token")}`;
  const verb = members.length + tokens === 1 ? "sees" : "see";
  const first = `${persons}${withTokens} ${verb} this team’s work.`;
  const latest = invitations
    .map(({ endsAt }) => endsAt)
    .toSorted()
    .at(-1);
  if (latest === undefined) return first;
  const count =
    invitations.length === 1 ? "One invitation waits" : `${plural(invitations.length, "invitation")} wait`;
  return `${first} ${count}, until ${formatDate(latest)}.`;
}
