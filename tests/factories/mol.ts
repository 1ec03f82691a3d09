/** MOL blocks for tests, in the columns of the format. */

export interface TestAtom {
  at: readonly [number, number, number];
  symbol: string;
}

export const WATER: readonly TestAtom[] = [
  { symbol: "O", at: [0, 0, 0.1173] },
  { symbol: "H", at: [0, 0.7572, -0.4692] },
  { symbol: "H", at: [0, -0.7572, -0.4692] },
];
export const WATER_BONDS = [
  [1, 2, 1],
  [1, 3, 1],
] as const;

const three = (value: number) => String(value).padStart(3);

export function atomLine({ at, symbol }: TestAtom, tail = " 0  0  0  0  0  0  0  0  0  0  0  0"): string {
  return `${at.map((x) => x.toFixed(4).padStart(10)).join("")} ${symbol.padEnd(3)}${tail}\n`;
}

/** V2000 of water, or of what is given; `extra` stands before the end, `data` behind it. */
export function record(
  title: string,
  options: {
    atoms?: readonly TestAtom[];
    bonds?: readonly (readonly [number, number, number])[];
    extra?: string;
    data?: string;
    program?: string;
  } = {},
): string {
  const {
    atoms = WATER,
    bonds = WATER_BONDS,
    extra = "",
    data = "",
    program = "  Lowlying          3D",
  } = options;
  const counts = `${three(atoms.length)}${three(bonds.length)}  0  0  0  0            999 V2000\n`;
  const lines = atoms.map((atom) => atomLine(atom)).join("");
  const pairs = bonds.map((bond) => `${bond.map(three).join("")}  0\n`).join("");
  return `${title}\n${program}\n\n${counts}${lines}${pairs}${extra}M  END\n${data}$$$$\n`;
}

/** The same as V3000. */
export function record3000(
  title: string,
  atoms: readonly string[],
  bonds: readonly string[],
  data = "",
): string {
  const v30 = (line: string) => `M  V30 ${line}\n`;
  const body = [
    "BEGIN CTAB",
    `COUNTS ${atoms.length} ${bonds.length} 0 0 1`,
    "BEGIN ATOM",
    ...atoms,
    "END ATOM",
    "BEGIN BOND",
    ...bonds,
    "END BOND",
    "END CTAB",
  ];
  const head = `${title}\n  Lowlying          3D\n\n  0  0  0     0  0            999 V3000\n`;
  return `${head}${body.map(v30).join("")}M  END\n${data}$$$$\n`;
}
