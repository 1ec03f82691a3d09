import { Cite, FormulaLine, SectionLink } from "~/components/layout/reference-page";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { formatCount } from "~/lib/format";
import { RULES } from "~/lib/plan/hours";
import { formatHours } from "~/lib/plan/words";
import { BOOTSTRAP_RESAMPLES } from "~/lib/stats/bootstrap";
import { GENERATOR_NAME } from "~/lib/stats/random";
import { DRAWS } from "~/lib/trust/energy-draws";

/** How two levels of theory are compared, and what a window keeps. */
export function LevelsText() {
  return (
    <>
      <p>
        Energies a<sub>i</sub> of a level and b<sub>i</sub> of a reference on the same conformers; those that
        lack one of them are left out and counted. A deviation needs a shared zero of energy, which you
        choose:
      </p>
      <FormulaLine>
        d<sub>i</sub> = a<sub>i</sub> − b<sub>i</sub> − offset
      </FormulaLine>
      <p>
        The offset is the mean difference (the default, of the least RMSD), the median difference (of the
        least MAD), the difference of the two lowest energies, or that at one common conformer, whose own 0
        counts in n. With the last two one bad conformer shifts all deviations.
      </p>
      <FormulaLine>
        MSD = Σ d / n, MAD = Σ |d| / n, RMSD = √(Σ d<sup>2</sup> / n), SD = √(Σ (d − mean d)<sup>2</sup> / (n
        − 1))
      </FormulaLine>
      <p>
        MAD is the mean absolute deviation. The SD and the differences between pairs of conformers know no
        zero; the SD is what to take as the error of a level. Pearson's r is given beside the range of the
        energies, since it grows with it; Spearman's ρ is Pearson's r of the ranks, ties sharing the mean
        rank; Kendall's τ<sub>b</sub> = (C − D)/√((n<sub>0</sub> − n<sub>1</sub>)(n<sub>0</sub> − n
        <sub>2</sub>)) with pairs tied in one list <Cite remembered>Biometrika 1945, 33, 239</Cite>. Below
        four conformers, and where a level is constant, no correlation is given.
      </p>
      <p>
        Populations p at the level and q at the reference share Σ min(p, q). The Jensen-Shannon divergence is
        H((p + q)/2) − (H(p) + H(q))/2 in bits <Cite remembered>IEEE Trans. Inf. Theory 1991, 37, 145</Cite>.
        The Kullback-Leibler divergence Σ q ln(q/p) is infinite where the level gives 0 to what the reference
        populates.
      </p>
      <p>
        Intervals are percentile bootstrap intervals: {formatCount(BOOTSTRAP_RESAMPLES)} resamples of the
        conformers, each with its own offset <Cite remembered>J. Am. Stat. Assoc. 1987, 82, 171</Cite>. The
        conformers of one molecule are not independent, so they hold within this ensemble.
      </p>
      <p>
        A window w keeps R(w) = Σ q<sub>i</sub> over all conformers with a<sub>i</sub> − min a up to w. It is
        the best case: it knows nothing of conformers that were never found. Its band draws the reference's
        energies with their error (<SectionLink to="#level-error">below</SectionLink>) and says in how many
        draws the truly lowest conformer lies within. For several molecules the pooled window is the k-th
        smallest of those that each needs, k the share of the molecules to be served; its interval draws
        molecules, then conformers.
      </p>
      <p>
        In words: from τ<sub>b</sub> 0.8 on two levels agree closely on the order, from 0.5 in the main, from
        0.3 loosely, below that hardly. These bounds are our own.
      </p>
    </>
  );
}

/** How an error of the energies reaches populations and everything made of them. */
export function LevelErrorText() {
  return (
    <>
      <p>
        True energies are e<sub>i</sub> + ε<sub>i</sub> with normal errors; an error that all conformers share
        cancels. {formatCount(DRAWS)} draws, in pairs of opposite sign, each weighed anew; means, standard
        deviations and the values below which 2.5, 50 and 97.5 % of the draws lie{" "}
        <Cite remembered>JCGM 101:2008</Cite>. The generator is {GENERATOR_NAME}{" "}
        <Cite remembered>ACM Trans. Math. Softw. 2021, 47, 36</Cite>, its seed stands beside each figure, and
        numbers are taken in the order of the conformers: the same input gives the same digits. Very large
        sets take fewer draws, and say how many.
      </p>
      <p>
        The mean over the draws is not the population of the computed energies: errors pull shares together.
        To first order sd(p<sub>i</sub>) = (σ p<sub>i</sub>/RT) √(Σ<sub>j</sub> (δ<sub>ij</sub> − p
        <sub>j</sub>)<sup>2</sup>), which fails where σ comes near RT.
      </p>
    </>
  );
}

/** What a plan computes, and its rules of thumb. */
export function PlanText() {
  return (
    <>
      <FormulaLine>
        cost = Σ<sub>k</sub> n<sub>k</sub> t<sub>k</sub> (1 + f), waiting = Σ<sub>k</sub> ⌈n<sub>k</sub>
        /slots⌉ t<sub>k</sub> (1 + f) / cores
      </FormulaLine>
      <p>
        n<sub>k</sub> structures computed at level k, t<sub>k</sub> core hours each, f the share of repeats.
        Each draw takes known energies, or those of the level before with a normal error a conformer, cuts in
        order of work with each window from the lowest that was computed at that level, and adds up the final
        population of those left. A cut by share takes the narrowest window that keeps the share of the mean
        final population.
      </p>
      <p>
        Timings of other sizes: t = t<sub>0</sub> (N/N<sub>0</sub>)<sup>α</sup>, α from a straight line
        through the logarithms where there are two sizes. Without timings a rule of thumb stands in. All of
        these are common practice, without a source; programs and machines differ by more than ten times:
      </p>
      <Table aria-label="Rules of thumb, common practice, no source">
        <thead>
          <tr>
            <Th>Computation</Th>
            <Th align="right" unit="core hours">
              At 40 atoms
            </Th>
            <Th align="right">Power of the size</Th>
          </tr>
        </thead>
        <tbody>
          {RULES.map(({ id, label, hours, exponent }) => (
            <Tr key={id}>
              <Td wrap>{label}</Td>
              <Td align="right">{formatHours(hours)}</Td>
              <Td align="right">{exponent}</Td>
            </Tr>
          ))}
        </tbody>
      </Table>
    </>
  );
}
