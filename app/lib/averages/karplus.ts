/**
 * Vicinal couplings from torsions (Karplus, J. Chem. Phys. 1959, 30, 11; J. Am. Chem. Soc. 1963, 85, 2870). The
 * coupling is averaged over conformers, never the angle.
 */

const RAD = Math.PI / 180;

/** A parameter set of J = A cos^2 t + B cos t + C, in Hz, t the torsion between the coupled nuclei or what stands for it. */
export interface KarplusSet {
  id: string;
  /** For people; the source behind it. */
  name: string;
  source: string;
  a: number;
  b: number;
  c: number;
}

/** Published sets for 3J(HN-HA) of peptides; t = phi - 60 degrees for an L residue (`peptide.ts`). */
export const KARPLUS_SETS: readonly KarplusSet[] = [
  {
    id: "hn-ha-1993",
    name: "peptide H–N–C–H, 6.51, −1.76, 1.60",
    source: "J. Am. Chem. Soc. 1993, 115, 7772",
    a: 6.51,
    b: -1.76,
    c: 1.6,
  },
  {
    id: "hn-ha-1997",
    name: "peptide H–N–C–H, 7.09, −1.42, 1.55",
    source: "J. Am. Chem. Soc. 1997, 119, 6360",
    a: 7.09,
    b: -1.42,
    c: 1.55,
  },
  {
    id: "hn-ha-1996",
    name: "peptide H–N–C–H, 6.98, −1.38, 1.72",
    source: "J. Am. Chem. Soc. 1996, 118, 2483",
    a: 6.98,
    b: -1.38,
    c: 1.72,
  },
];

/** Name of the general set for H-C-C-H with substituents, and of parameters typed in. */
export const GENERAL_SET = "h-c-c-h";
export const OWN_SET = "own";
export const GENERAL_SOURCE = "Tetrahedron 1980, 36, 2783";

/**
 * J = A cos^2 t + B cos t + C. The other form in use, in cos 2t, has other coefficients.
 *
 * @param torsionDeg between the coupled nuclei
 * @param set A, B, C in Hz
 * @returns Hz
 * @example karplus(-60 - 60, { a: 6.51, b: -1.76, c: 1.6 }) // 4.1075, phi = -60
 */
export function karplus(torsionDeg: number, set: { a: number; b: number; c: number }): number {
  const cosine = Math.cos(torsionDeg * RAD);
  return set.a * cosine * cosine + set.b * cosine + set.c;
}

/** A substituent on one of the two carbons of H-C-C-H. */
export interface Substituent {
  /** Huggins electronegativity minus that of hydrogen, less 0.14 times the sum over what it carries itself. */
  excess: number;
  /** +1 where it stands +120 degrees (clockwise) from the coupled H, seen from its own carbon to the other; else -1. */
  sign: 1 | -1;
}

/** General set of Tetrahedron 1980, 36, 2783: P1 to P6 (P6 in degrees); P7, 0.14, is in the excess already. */
const GENERAL = { p1: 13.7, p2: -0.73, p3: 0, p4: 0.56, p5: -2.47, p6: 16.9 } as const;
export const BETA_SHARE = 0.14;

/**
 * 3J of H-C-C-H with substituents: P1 cos^2 f + P2 cos f + P3 + sum dX [P4 + P5 cos^2(xi f + P6 |dX|)]
 * (Tetrahedron 1980, 36, 2783; general set).
 *
 * @param torsionDeg H-C-C-H, signed
 * @returns Hz
 * @example generalCoupling(60, [{ excess: 1.3, sign: 1 }]) // 3.7253
 */
export function generalCoupling(torsionDeg: number, substituents: readonly Substituent[]): number {
  const cosine = Math.cos(torsionDeg * RAD);
  let coupling = GENERAL.p1 * cosine * cosine + GENERAL.p2 * cosine + GENERAL.p3;
  for (const { excess, sign } of substituents) {
    const turned = Math.cos((sign * torsionDeg + GENERAL.p6 * Math.abs(excess)) * RAD);
    coupling += excess * (GENERAL.p4 + GENERAL.p5 * turned * turned);
  }
  return coupling;
}

/**
 * Electronegativity of an element minus that of hydrogen, on the scale of J. Am. Chem. Soc. 1953, 75, 4123; C 0.40 and
 * O 1.30 as the general set uses them, the others from memory.
 */
const EXCESS: Record<number, number> = {
  1: 0,
  6: 0.4,
  7: 0.85,
  8: 1.3,
  9: 1.7,
  14: -0.3,
  15: -0.05,
  16: 0.4,
  17: 0.95,
  35: 0.75,
  53: 0.45,
};

/** @returns null for an element that the scale does not list here */
export function electronegativityExcess(element: number): number | null {
  return EXCESS[element] ?? null;
}
