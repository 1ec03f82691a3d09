import { Cite, FormulaLine, type ReferenceSection, SectionLink } from "~/components/layout/reference-page";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { fixed } from "~/lib/format";
import { CONSTANTS_YEAR } from "~/lib/units";
import { AveragesText, SamplingText } from "./average-sections";
import { LevelErrorText, LevelsText, PlanText } from "./level-sections";

/** Figures that the text names, as the code has them. */
export interface MethodNumbers {
  gasConstant: number;
  thermal: number;
  units: { unit: string; kcal: number; kj: number }[];
  bondFactor: number;
  contestedFactor: number;
  tooClose: number;
  flat: number;
  symmetryTolerance: number;
  symmetryReach: number;
  energyTolerance: number;
  rmsdTolerance: number;
}

const sum = (
  <>
    Σ<sub>i</sub>
  </>
);

/** The methods in use today, section by section. */
export function methodSections(n: MethodNumbers): ReferenceSection[] {
  return [
    { id: "caution", title: "What the results are, and are not", body: <Caution /> },
    { id: "constants", title: "Constants and units", body: <Constants n={n} /> },
    { id: "bonds", title: "Bonds, species, configuration", body: <BondsText n={n} /> },
    { id: "rmsd", title: "RMSD", body: <RmsdText /> },
    { id: "symmetry", title: "Symmetry and mirror images", body: <SymmetryText n={n} /> },
    { id: "distinct-set", title: "The distinct set", body: <DistinctText n={n} /> },
    { id: "populations", title: "Populations and free energy", body: <PopulationsText /> },
    { id: "levels", title: "Levels against each other, and windows", body: <LevelsText /> },
    { id: "level-error", title: "The error of a level", body: <LevelErrorText /> },
    { id: "plan", title: "Plans and their cost", body: <PlanText /> },
    { id: "averages", title: "Averages over conformers and atoms", body: <AveragesText /> },
    { id: "sampling", title: "How complete a search is", body: <SamplingText /> },
    { id: "measures", title: "Distances, angles, torsions", body: <MeasuresText /> },
    { id: "digits", title: "Digits, exports, repeatability", body: <DigitsText /> },
  ];
}

function Caution() {
  return (
    <>
      <p>
        Everything Lowlying shows is a computed estimate, to be confirmed by experiment. It describes the
        frames that were taken in, at the level of theory they were computed with, and knows nothing of shapes
        that were never found.
      </p>
      <p>
        It is no basis for decisions on dosing, safety or regulatory matters, nor for handling a substance.
        Local rules and licensed practice come first.
      </p>
    </>
  );
}

function Constants({ n }: { n: MethodNumbers }) {
  return (
    <>
      <p>
        One table for the whole product, {CONSTANTS_YEAR}: R = {n.gasConstant} J/(mol K), exact; 1 cal = 4.184
        J by definition. RT at 298.15 K is {fixed(n.thermal, 6)} kcal/mol and is never rounded.
      </p>
      <Table aria-label="Energy units" className="text-sm">
        <thead>
          <tr>
            <Th>One</Th>
            <Th align="right" unit="kcal/mol">
              in
            </Th>
            <Th align="right" unit="kJ/mol">
              in
            </Th>
          </tr>
        </thead>
        <tbody>
          {n.units.map(({ unit, kcal, kj }) => (
            <Tr key={unit}>
              <Td>
                {unit === "cm-1" ? (
                  <>
                    cm<sup>−1</sup>
                  </>
                ) : (
                  unit
                )}
              </Td>
              <Td align="right">{fixed(kcal, 9)}</Td>
              <Td align="right">{fixed(kj, 9)}</Td>
            </Tr>
          ))}
        </tbody>
      </Table>
      <p>
        Absolute energies are subtracted in their own unit first; the difference is converted once. Programs
        convert with older factors, so give the value in the unit that the program worked in.
      </p>
    </>
  );
}

function BondsText({ n }: { n: MethodNumbers }) {
  return (
    <>
      <p>
        Bonds are found in each frame from its coordinates. With covalent radii r{" "}
        <Cite>Dalton Trans. 2008, 2832</Cite> two atoms are bonded where
      </p>
      <FormulaLine>
        {fixed(n.tooClose, 1)} Å &lt; d, and d at most {fixed(n.bondFactor, 2)} (r<sub>i</sub> + r<sub>j</sub>
        )
      </FormulaLine>
      <p>
        Up to {fixed(n.contestedFactor, 2)} times the sum a pair is contested: reported, not bonded. A proton
        between two partners belongs to the nearer one and is called shared. The factors are our own choice.
      </p>
      <p>
        Two frames show the same species when their bonded graphs, coloured by element, are isomorphic. Colour
        refinement sorts them <Cite remembered>J. Mach. Learn. Res. 2011, 12, 2539</Cite>; an exact search
        confirms. A frame of another species is held, with the bonds that formed and broke.
      </p>
      <p>
        A stereocentre has the sign of the volume that its neighbours span; a value below {fixed(n.flat, 2)}{" "}
        (an ideal tetrahedron has 0.77) counts as flat. Double bonds are told by length. Two frames have the
        same configuration when some exchange of equivalent atoms carries the signs of one onto the other;
        others are held. Axial, planar and helical chirality are not seen by this test.
      </p>
    </>
  );
}

function RmsdText() {
  return (
    <>
      <p>For two sets of n atoms with their centroids at the origin, over all proper rotations:</p>
      <FormulaLine>
        RMSD<sup>2</sup> = (E<sub>x</sub> + E<sub>y</sub> − 2 λ) / n
      </FormulaLine>
      <p>
        where E is the sum of squared coordinates and λ the largest root of the characteristic polynomial of
        the quaternion matrix <Cite>J. Opt. Soc. Am. A 1987, 4, 629</Cite>{" "}
        <Cite>Acta Cryst. A 2005, 61, 478</Cite>; it equals the minimum by singular values{" "}
        <Cite>Acta Cryst. A 1976, 32, 922</Cite> <Cite>Acta Cryst. A 1978, 34, 827</Cite>. Near zero the
        residuals are summed one by one, since the difference loses its digits there.
      </p>
      <p>
        Rotations are always proper: a reflection would call two hands the same. Atoms count alike, without
        masses. Files with four to six decimals carry noise below 0.001 Å; such values read “below 0.001”.
      </p>
    </>
  );
}

function SymmetryText({ n }: { n: MethodNumbers }) {
  return (
    <>
      <p>
        Equivalent atoms may be exchanged. The symmetry-corrected RMSD is the minimum over all exchanges π:
      </p>
      <FormulaLine>
        RMSD<sub>sym</sub>(x, y) = min over π in Aut(G) of RMSD(x, π y)
      </FormulaLine>
      <p>
        Aut(G) are the automorphisms of the bonded graph with all hydrogens, coloured by element, not by bond
        order: the two oxygens of a carboxylate are equivalent. For a choice of atoms (heavy, heavy with
        hydrogens on N, O, S and P, or all) the automorphisms are restricted to it. The minimum is exact,
        found by branch and bound without listing the group; where a bound on the work is met the value is
        marked “upper bound”.
      </p>
      <p>
        The mirror RMSD of a conformer compares it with its own mirror image in the same way. In an achiral
        molecule a conformer that differs from its mirror image stands for two equally populated shapes:
        degeneracy 2. In a chiral molecule the mirror image is the enantiomer: images are never merged and the
        degeneracy is 1. A molecule is taken as achiral when some automorphism maps every stereocentre onto
        one of opposite sign; the recipe can override this and then says so.
      </p>
      <p>
        The symmetry number σ of a conformer counts the automorphisms of all atoms that a proper rotation
        realises within {fixed(n.symmetryTolerance, 2)} Å, with no atom farther than{" "}
        {fixed(n.symmetryReach, 1)} Å from the place it maps to.
      </p>
      <FormulaLine>copies = degeneracy / σ, scaled so that the smallest is 1</FormulaLine>
    </>
  );
}

function DistinctText({ n }: { n: MethodNumbers }) {
  return (
    <>
      <p>
        Accepted frames are sorted by energy, equal ones by frame number, and walked from the lowest. A frame
        repeats a kept one when both their energies lie within the energy tolerance and their
        symmetry-corrected RMSD lies within the RMSD tolerance (mirror images as the recipe says); else it is
        kept. Of several it could repeat, the lowest is named. “Within” includes the tolerance itself.
      </p>
      <p>
        Start values, our own choice and no published thresholds: {fixed(n.energyTolerance, 2)} kcal/mol and{" "}
        {fixed(n.rmsdTolerance, 3)} Å. “Within tolerance” is not transitive, so another rule may count
        differently; this one gives the same answer for the same frames, in any order of the file but for
        equal energies.
      </p>
      <p>
        Pairs are ruled out early only by bounds that no exchange of equivalent atoms and no rotation can
        break, such as the difference of the radii of gyration. How often a conformer was found never weighs.
      </p>
    </>
  );
}

function PopulationsText() {
  return (
    <>
      <p>
        With relative energies e<sub>i</sub> and weights w<sub>i</sub> at temperature T:
      </p>
      <FormulaLine>
        p<sub>i</sub> = w<sub>i</sub> exp(−e<sub>i</sub>/RT) / Z, Z = Σ<sub>j</sub> w<sub>j</sub> exp(−e
        <sub>j</sub>/RT)
      </FormulaLine>
      <FormulaLine>F = −RT ln Z, relative to the lowest conformer</FormulaLine>
      <FormulaLine>
        U = {sum} p<sub>i</sub> e<sub>i</sub>, S = −R {sum} p<sub>i</sub> ln(p<sub>i</sub>/w<sub>i</sub>)
      </FormulaLine>
      <FormulaLine>
        C = {sum} p<sub>i</sub> (e<sub>i</sub> − U)<sup>2</sup> / (R T<sup>2</sup>), effective number =
        exp(S/R)
      </FormulaLine>
      <p>
        <Cite remembered>Chem. Rev. 2009, 109, 4092</Cite>; the effective number is the Hill number of order 1{" "}
        <Cite remembered>Ecology 1973, 54, 427</Cite> and counts microstates. Sums are taken in logarithms,
        from the smallest term to the largest. These are conformational parts only: no vibrations, no solvent
        beyond what the energies hold.
      </p>
      <ul>
        <li>
          Electronic energies are weighted by <em>copies</em>, since exchange of identical groups is not in
          them.
        </li>
        <li>
          Free energies that hold the symmetry number are weighted by <em>degeneracy</em>; copies would count
          the exchange twice.
        </li>
        <li>Frames without an energy get no population; they are counted, never taken as zero.</li>
        <li>
          A window leaves out what lies above it. The page says how much population that is, among the frames
          at hand.
        </li>
      </ul>
      <p>
        An error of 0.5 kcal/mol in an energy difference changes a ratio of populations by a factor of 2.3 at
        298.15 K. Read populations with <SectionLink to="#level-error">the error of your level</SectionLink>{" "}
        in mind.
      </p>
    </>
  );
}

function MeasuresText() {
  return (
    <>
      <p>
        Distances are between nuclei; angles lie between 0 and 180°; torsions between −180 and 180°, by the
        two-argument arctangent, positive when the far bond is turned clockwise. Collinear atoms have no
        torsion: the value is left out.
      </p>
      <p>
        The distribution of a measure counts each conformer with its population. Where a conformer stands for
        a mirror pair its torsion counts half at t and half at −t. A torsion is never averaged as a plain
        number: over a circle, the mean direction of {sum} p<sub>i</sub> exp(i t<sub>i</sub>) is taken.
      </p>
    </>
  );
}

function DigitsText() {
  return (
    <>
      <p>
        The page prints energies with two decimals in kcal/mol, populations with one in per cent, RMSD with
        three in Å, torsions in whole degrees. Copy and every file give the full value.
      </p>
      <p>
        A recipe holds every setting of a sift. The same recipe on the same accepted frames gives the same
        digits, and the same sift. Files keep their original bytes under their SHA-256; exports name the
        recipe and the checksums where their format allows it. What a slider moves is computed in the browser
        by the same code as on the server.
      </p>
      <p>
        Which files are read, and what is held back:{" "}
        <SectionLink to="/formats">what the readers accept</SectionLink>.
      </p>
    </>
  );
}
