/** What kind of method the name of a level speaks of, from the cheapest to the one that is trusted most. */
export const LEVEL_KINDS = [
  "force field",
  "semi-empirical",
  "Hartree-Fock",
  "density functional",
  "second-order perturbation",
  "coupled cluster",
  "reference",
] as const;
export type LevelKind = (typeof LEVEL_KINDS)[number];

/**
 * Trade names by kind: common practice, no source. The first that fits counts, so what is trusted most comes first:
 * "CCSD(T)/CBS // MP2" is coupled cluster. A name begins and ends where letters and figures do not go on.
 */
const NAMES: readonly (readonly [LevelKind, RegExp])[] = [
  ["reference", word("published|ref(?:erence)?|experiment(?:al)?|exptl?|measured")],
  [
    "coupled cluster",
    word(
      "q?ccsdt?(?:\\(t\\))?|ccsdtq?|(?:dlpno|lno|pno)-ccsd(?:\\(t\\))?|cbs-[a-z0-9]+|w[1-4]h?|w1-f12|g[34](?:mp2)?",
    ),
  ],
  // A double hybrid is a density functional, though its name may speak of the perturbation.
  ["density functional", word("b2-?plyp|b2gp-plyp|dsd-[a-z0-9]+|xyg3")],
  ["second-order perturbation", word("(?:ri-|df-|l|dlpno-|scs-|sos-)*mp[234](?:-f12)?")],
  [
    "density functional",
    word(
      "(?:cam-|u|r)?b3-?lyp|b3pw91|b97[a-z0-9-]*|blyp|bp86|pbe(?:0|h)?|revpbe|tpssh?|r2?-?scan|m0[568][a-z0-9-]*|m1[15][a-z0-9-]*|mn1[25][a-z0-9-]*|[wω]b97[a-z0-9-]*|lc-[wω]pbe|hse0[36]|pw6b95|b1b95|bhandhlyp|o3?lyp|x3lyp|[sl]vwn|lda|dft",
    ),
  ],
  ["Hartree-Fock", word("[ur]?o?hf|hartree-fock")],
  ["semi-empirical", word("pm[367](?:-[a-z0-9]+)?|am1|rm1|mndo(?:-?d)?|mindo3?|om[123]|zindo|indo|cndo")],
  [
    "force field",
    word(
      "mmff(?:94s?)?|uff|gaff2?|amber[a-z0-9]*|opls[a-z0-9-]*|charmm[a-z0-9]*|mm[234]|dreiding|ff[0-9]{2}[a-z0-9]*",
    ),
  ],
  // The limit of the basis set alone: with a method before it, the method counts.
  ["coupled cluster", word("cbs")],
];

function word(names: string): RegExp {
  return new RegExp(`(?<![\\p{L}\\p{N}])(?:${names})(?![\\p{L}\\p{N}])`, "iu");
}

/** Longest name that is read: names of levels are shorter. */
const MOST_READ = 200;

/**
 * The kind of method that a level is named after; null where its name says nothing. Good for a first proposal only:
 * what was computed is not known from a name.
 *
 * @example kindOfLevel("B3LYP/6-31G(d)") // "density functional"
 * @example kindOfLevel("level 2") // null
 */
export function kindOfLevel(name: string): LevelKind | null {
  const read = name.slice(0, MOST_READ).replaceAll("_", " ");
  // "MP2//B3LYP": energies of the one on geometries of the other.
  const energies = read.split("//")[0] ?? read;
  return NAMES.find(([, pattern]) => pattern.test(energies))?.[0] ?? null;
}

/**
 * Which level is judged and which it is judged against, where nobody has said so: the cheapest kind against the one that
 * is trusted most. Where the names tell no two kinds apart the order of arrival decides, and the later one is the reference.
 *
 * @param levels in order of arrival
 * @returns null for both without a level; one level is the level to be judged
 * @example cheapAndBetter([{ name: "CCSD(T)/CBS" }, { name: "MMFF94" }]).reference // { name: "CCSD(T)/CBS" }
 */
export function cheapAndBetter<T extends { name: string }>(
  levels: readonly T[],
): { level: T | null; reference: T | null } {
  const ranked = levels.map((level) => ({ level, kind: kindOfLevel(level.name) }));
  const [first] = ranked;
  if (first === undefined) return { level: null, reference: null };
  const known = ranked.flatMap(({ level, kind }) =>
    kind === null ? [] : [{ level, rank: LEVEL_KINDS.indexOf(kind) }],
  );
  // The sort keeps the order of arrival among equals.
  known.sort((a, b) => a.rank - b.rank);
  const [cheapest, best] = [known[0], known.at(-1)];
  if (cheapest && best && cheapest.rank < best.rank) return { level: cheapest.level, reference: best.level };
  // Called the reference, it is one beside levels whose names say nothing.
  if (best && LEVEL_KINDS[best.rank] === "reference" && known.length < ranked.length) {
    const other = ranked.find(({ kind }) => kind === null);
    if (other) return { level: other.level, reference: best.level };
  }
  return { level: first.level, reference: ranked.length > 1 ? ranked.at(-1)!.level : null };
}

/**
 * The pair to propose for several molecules at once: of the pairs that single ensembles would propose the one that most
 * ensembles have, of equal ones that which more of them propose.
 *
 * @param lists levels of each ensemble, in order of arrival
 * @returns names, the level to be judged in front; null where no ensemble has two levels
 * @example commonPair([[{ name: "published" }, { name: "MMFF94" }]]) // ["MMFF94", "published"]
 */
export function commonPair(lists: readonly (readonly { name: string }[])[]): [string, string] | null {
  const votes = new Map<string, { pair: [string, string]; having: number; votes: number }>();
  for (const list of lists) {
    const { level, reference } = cheapAndBetter(list);
    if (level === null || reference === null) continue;
    const pair: [string, string] = [level.name, reference.name];
    const key = JSON.stringify(pair);
    const found = votes.get(key) ?? { pair, having: 0, votes: 0 };
    votes.set(key, { ...found, votes: found.votes + 1 });
  }
  for (const names of lists.map((list) => new Set(list.map(({ name }) => name)))) {
    for (const vote of votes.values()) if (vote.pair.every((name) => names.has(name))) vote.having += 1;
  }
  return [...votes.values()].sort((a, b) => b.having - a.having || b.votes - a.votes)[0]?.pair ?? null;
}

/**
 * The same where one side is asked for, by its id or name: the other is the cheapest or the best of the rest.
 *
 * @example chooseLevels(levels, { level: "a", reference: null }).reference // the best of the others
 */
export function chooseLevels<T extends { id: string; name: string }>(
  levels: readonly T[],
  asked: { level: string | null; reference: string | null },
): { level: T | null; reference: T | null } {
  const meant = (said: string | null) =>
    levels.find(({ id }) => id === said) ?? levels.find(({ name }) => name === said) ?? null;
  const level = meant(asked.level);
  const reference = meant(asked.reference);
  if (level === null && reference === null) return cheapAndBetter(levels);
  const others = levels.filter((one) => one !== level && one !== reference);
  const rest = cheapAndBetter(others);
  if (level === null) return { level: rest.level, reference };
  if (reference !== null && reference !== level) return { level, reference };
  return { level, reference: rest.reference ?? rest.level };
}
