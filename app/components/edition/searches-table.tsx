import { Table, Td, Th, Tr } from "~/components/ui/table";
import type { EditionView } from "~/lib/edition/views";
import { fixed, formatCount } from "~/lib/format";

/** What each search found of the distinct set, where the frames came from several. */
export function SearchesTable({ edition }: { edition: EditionView }) {
  const { searches } = edition;
  if (searches === null) return null;
  const { each, pair } = searches;
  return (
    <div className="keep">
      <h3 id="edition-searches" className="mt-5 mb-2 text-sm font-semibold">
        Searches
      </h3>
      <Table aria-labelledby="edition-searches">
        <thead>
          <tr>
            <Th>Search</Th>
            <Th align="right">Frames</Th>
            <Th align="right">Shapes</Th>
            <Th align="right" unit="%">
              Coverage
            </Th>
          </tr>
        </thead>
        <tbody>
          {each.map(({ name, frames, found, coverage }, k) => (
            <Tr key={k}>
              <Td wrap className="[overflow-wrap:anywhere]">
                {name}
              </Td>
              <Td align="right">{formatCount(frames)}</Td>
              <Td align="right">{formatCount(found)}</Td>
              <Td align="right">{fixed(coverage === null ? null : 100 * coverage, 1)}</Td>
            </Tr>
          ))}
        </tbody>
      </Table>
      {pair === null ? null : (
        <p className="figures mt-2 text-xs text-ink-3">
          The first found {formatCount(pair.first)}, the later ones {formatCount(pair.second)}, and{" "}
          {formatCount(pair.both)} were found by both: about {fixed(pair.estimate, 1)} exist by capture and
          recapture. That goes by what both met and is too low where both favour the same shapes; an estimate
          from how often each shape was found can differ, and the larger one counts.
        </p>
      )}
    </div>
  );
}
