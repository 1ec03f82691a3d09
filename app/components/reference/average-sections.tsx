import { Cite, FormulaLine, SectionLink } from "~/components/layout/reference-page";
import { LEAST_COVERED } from "~/lib/averages/average";
import { KARPLUS_SETS } from "~/lib/averages/karplus";
import { FEWEST_FOR_CORRECTION, FEWEST_FOR_SCALING } from "~/lib/averages/shielding-fit";
import { formatPercent } from "~/lib/format";
import { LEAST_RESULTANT } from "~/lib/measure/circular";

/** How properties are averaged over conformers and equivalent atoms. */
export function AveragesText() {
  return (
    <>
      <FormulaLine>
        ⟨A⟩ = Σ p<sub>i</sub> A<sub>i</sub> / Σ p<sub>i</sub>, spread = √(Σ p<sub>i</sub> (A<sub>i</sub> −
        ⟨A⟩)
        <sup>2</sup> / Σ p<sub>i</sub>)
      </FormulaLine>
      <p>
        The spread belongs to the shapes and is no error bar. The uncertainty is the standard deviation of the
        average over draws of the energies (<SectionLink to="#level-error">error of a level</SectionLink>).
        Missing values are left out and the rest is renormalised; below {formatPercent(LEAST_COVERED)} of the
        population covered nothing is averaged, and <i>averages.csv</i> leaves average, spread and uncertainty
        empty there.
      </p>
      <p>
        Distances: r<sup>−6</sup> as an NOE sees them when conformers exchange slower than the molecule
        tumbles, (Σ p<sub>i</sub> r<sub>i</sub>
        <sup>−6</sup>)<sup>−1/6</sup>; r<sup>−3</sup> for faster motion, such as a turning methyl group{" "}
        <Cite remembered>J. Chem. Phys. 1980, 72, 6035</Cite>. Pairs of equivalent atoms are averaged first,
        by the same rule and as a mean, not a sum. Lengths of vectors average as the root of the mean square.
      </p>
      <p>
        Angles: z = Σ p<sub>i</sub> exp(i t<sub>i</sub>), mean = arg z, R = |z|, spread √(−2 ln R). Below R ={" "}
        {LEAST_RESULTANT} there is no mean but a distribution. A conformer of degeneracy 2 enters half at t
        and half at −t. What changes sign in the mirror image (optical rotation, circular dichroism) is
        exactly 0 in an achiral molecule.
      </p>
      <p>
        Equivalent atoms are those that an exchange of atoms carries into each other with the hand of every
        four-coordinate centre (CH<sub>2</sub> and CH<sub>3</sub> included, three-coordinate S and P too) and
        the sides of every double bond kept; in an achiral molecule also with every hand turned.
        Diastereotopic hydrogens of a CH
        <sub>2</sub> so stay apart. A frame whose file numbers equivalent atoms otherwise is read in the
        common numbering first. Rotation about amides and hindered bonds is taken to be fast, unless somebody
        takes a group apart by hand: each part is a signal of its own then, for every per-atom quantity of the
        ensemble, until the group is put together again.
      </p>
      <p>
        Couplings: J = A cos<sup>2</sup> t + B cos t + C with t the torsion between the coupled nuclei{" "}
        <Cite>J. Chem. Phys. 1959, 30, 11</Cite> <Cite>J. Am. Chem. Soc. 1963, 85, 2870</Cite>; for peptide
        H–N–C–H{" "}
        {KARPLUS_SETS.map((set) => (
          <Cite key={set.id}>{set.source}</Cite>
        ))}{" "}
        with t = φ − 60°, φ the torsion C–N–C–C of the residue (φ + 60° where the hydrogen stands on the other
        side, as in a D residue; the picked torsion where there is no such chain); for H–C–C–H with
        substituents the general set of <Cite>Tetrahedron 1980, 36, 2783</Cite>, with what the substituents
        carry themselves taken into account. Electronegativities of C and O are those of the set, the others
        from memory. J is averaged, never the angle.
      </p>
      <p>
        Shieldings become shifts by linear scaling, δ = (intercept − σ)/(−slope){" "}
        <Cite remembered>Chem. Rev. 2012, 112, 1839</Cite>: slope and intercept are typed in, or fitted by
        least squares to at least {FEWEST_FOR_SCALING} measured shifts of the same nucleus (σ = intercept +
        slope δ); they belong to one level, solvent and nucleus. With slope −1 the intercept is the shielding
        of the reference. Against measured values: mean absolute, root mean square and largest deviation, a
        nucleus at a time and never pooled; from {FEWEST_FOR_CORRECTION} pairs on also the line of computed
        against measured values, d = m e + b, and the mean absolute deviation of (d − b)/m. A line fitted to
        the values that it is compared with flatters. Properties of the whole molecule (couplings, distances)
        are set beside measured ones unit by unit, angles the short way round; those without a unit are
        compared, not pooled.
      </p>
      <p>
        Two signals that the bonds do not tell apart (diastereotopic hydrogens or groups, parts of a group
        taken apart) may have been assigned either way: both assignments are reported, each with the mean
        absolute deviation of the two and of their nucleus, and one of them is chosen by a person. Of more
        than two alike the nearest through bonds make a pair.
      </p>
      <p>
        Labels of torsions: c up to 30°, g± to 90°, a± to 150°, t above{" "}
        <Cite remembered>Experientia 1960, 16, 521</Cite>. What one conformer does to an average is told three
        ways: its share of the sum, the average without it, and the derivative −(p<sub>j</sub>/RT)(A
        <sub>j</sub> − ⟨A⟩) by its energy.
      </p>
    </>
  );
}

/** How complete a search is. */
export function SamplingText() {
  return (
    <>
      <p>
        From the number of times that each distinct conformer was found, n hits in all, f<sub>1</sub> seen
        once and f<sub>2</sub> seen twice:
      </p>
      <FormulaLine>
        coverage = 1 − f<sub>1</sub>/n, at least S + ((n − 1)/n) f<sub>1</sub>
        <sup>2</sup>/(2 f<sub>2</sub>) conformers
      </FormulaLine>
      <p>
        <Cite>Biometrika 1953, 40, 237</Cite> <Cite>Scand. J. Stat. 1984, 11, 265</Cite>, its interval after{" "}
        <Cite>Biometrics 1987, 43, 783</Cite>, rarefaction and extrapolation after{" "}
        <Cite>J. Plant Ecol. 2012, 5, 3</Cite>. Two searches with n<sub>1</sub> and n<sub>2</sub> conformers,
        m in both, point to (n<sub>1</sub> + 1)(n<sub>2</sub> + 1)/(m + 1) − 1{" "}
        <Cite remembered>Univ. Calif. Publ. Stat. 1951, 1, 131</Cite>.
      </p>
      <p>
        Coverage is a share of the search's own hits, not of the population; hits are rarely independent; the
        estimate is a lower bound; everything hangs on the RMSD tolerance. If nothing was found once there is
        no evidence of a missing conformer, which is no proof. If repeats were removed before the files came,
        nothing can be said.
      </p>
    </>
  );
}
