/**
 * Levels of theory that comments and file names give away. Only a text to propose: nobody's energies are named unasked.
 */

/** Pattern and how the trade writes it, longer names first. Matched against words apart by other characters. */
const METHODS: readonly (readonly [pattern: string, name: string])[] = [
  ["mmff94s", "MMFF94s"],
  ["mmff94", "MMFF94"],
  ["mmff", "MMFF94"],
  ["uff", "UFF"],
  ["gaff2", "GAFF2"],
  ["gaff", "GAFF"],
  ["dlpno-ccsd(t)", "DLPNO-CCSD(T)"],
  ["ccsd(t)", "CCSD(T)"],
  ["ccsd", "CCSD"],
  ["mp2", "MP2"],
  ["b3lyp-d3", "B3LYP-D3"],
  ["b3lyp-d4", "B3LYP-D4"],
  ["b3lyp", "B3LYP"],
  ["wb97x-d", "ωB97X-D"],
  ["wb97x-v", "ωB97X-V"],
  ["wb97m-v", "ωB97M-V"],
  ["m06-2x", "M06-2X"],
  ["pbe0", "PBE0"],
  ["pbe", "PBE"],
  ["bp86", "BP86"],
  ["tpss", "TPSS"],
  ["hf", "HF"],
  ["pm6", "PM6"],
  ["pm7", "PM7"],
  ["am1", "AM1"],
];

const BASES: readonly (readonly [pattern: string, name: string])[] = [
  ["def2-qzvpp", "def2-QZVPP"],
  ["def2-tzvppd", "def2-TZVPPD"],
  ["def2-tzvpp", "def2-TZVPP"],
  ["def2-tzvp", "def2-TZVP"],
  ["def2-svpd", "def2-SVPD"],
  ["def2-svp", "def2-SVP"],
  ["aug-cc-pvtz", "aug-cc-pVTZ"],
  ["aug-cc-pvdz", "aug-cc-pVDZ"],
  ["cc-pvqz", "cc-pVQZ"],
  ["cc-pvtz", "cc-pVTZ"],
  ["cc-pvdz", "cc-pVDZ"],
  ["6-311+g(d,p)", "6-311+G(d,p)"],
  ["6-311g(d,p)", "6-311G(d,p)"],
  ["6-31+g(d)", "6-31+G(d)"],
  ["6-31g(d,p)", "6-31G(d,p)"],
  ["6-31g(d)", "6-31G(d)"],
  ["6-31gdp", "6-31G(d,p)"],
  ["6-31gd", "6-31G(d)"],
  ["6-31g*", "6-31G(d)"],
  ["sto-3g", "STO-3G"],
];

const WITHOUT_BASIS = new Set(["MMFF94s", "MMFF94", "UFF", "GAFF2", "GAFF", "PM6", "PM7", "AM1"]);

/**
 * A name for the level that a comment line or a file name mentions, or null.
 *
 * @param texts the first comments and the file name, the likelier first
 * @example suggestLevel(["-235.2032", "hexane.hf-def2-svp.xyz"]) // "HF/def2-SVP"
 */
export function suggestLevel(texts: readonly string[]): string | null {
  for (const text of texts) {
    const lower = text.slice(0, 1000).toLowerCase();
    const method = METHODS.find(([pattern]) => hasWord(lower, pattern));
    if (!method) continue;
    const basis = BASES.find(([pattern]) => lower.includes(pattern));
    return basis && !WITHOUT_BASIS.has(method[1]) ? `${method[1]}/${basis[1]}` : method[1];
  }
  return null;
}

function hasWord(text: string, word: string): boolean {
  for (let at = text.indexOf(word); at >= 0; at = text.indexOf(word, at + 1)) {
    const before = text[at - 1] ?? " ";
    const behind = text[at + word.length] ?? " ";
    if (!/[a-z0-9]/.test(before) && !/[a-z0-9]/.test(behind)) return true;
  }
  return false;
}
