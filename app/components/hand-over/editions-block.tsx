import { Form, href, useLocation } from "react-router";
import { Badge } from "~/components/ui/badge";
import { Button } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { SelectField } from "~/components/ui/select-field";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { linkClass, TextLink } from "~/components/ui/text-link";
import type { EditionRow, HandOverView } from "~/lib/edition/views";
import { formatDateShort, formatMoment, formatTime } from "~/lib/format";
import { FreezeDialog } from "./freeze-dialog";

/** Editions, newest first; above them what the next one would hold. */
export function EditionsBlock({ ensembleId, view }: { ensembleId: string; view: HandOverView }) {
  const { editions, next, mayShare, now } = view;
  return (
    <section className="mt-8" aria-labelledby="editions-title">
      <BlockHead title="Editions" id="editions-title">
        {mayShare && next ? <FreezeDialog next={next} last={editions[0]?.number ?? null} /> : null}
      </BlockHead>
      <Table aria-labelledby="editions-title">
        <thead>
          <tr>
            <Th>Edition</Th>
            <Th unit="UTC">Frozen</Th>
            <Th className="max-xl:hidden">By</Th>
            <Th className="max-sm:hidden">What changed since the one before</Th>
            <Th align="right" unit="live" className="max-md:hidden">
              Links
            </Th>
            <Th>Verified</Th>
          </tr>
        </thead>
        <tbody>
          {next ? (
            <Tr className="border-dashed text-ink-2">
              <Td>{next.number}</Td>
              <Td>not yet</Td>
              <Td className="max-xl:hidden">–</Td>
              <Td wrap className="max-sm:hidden">
                {next.changed.join("; ")}
              </Td>
              <Td align="right" className="max-md:hidden">
                –
              </Td>
              <Td>{mayShare ? <Badge tone="ask">yours to freeze</Badge> : null}</Td>
            </Tr>
          ) : null}
          {editions.map((edition) => (
            <Row
              key={edition.number}
              edition={edition}
              ensembleId={ensembleId}
              now={now}
              mayShare={mayShare}
            />
          ))}
        </tbody>
      </Table>
      {editions.length > 1 ? <CompareForm editions={editions} /> : null}
    </section>
  );
}

function Row({
  edition,
  ensembleId,
  now,
  mayShare,
}: {
  edition: EditionRow;
  ensembleId: string;
  now: string;
  mayShare: boolean;
}) {
  const number = String(edition.number);
  return (
    <Tr className="figures">
      <Td>
        <TextLink
          className="font-semibold"
          to={href("/ensembles/:id/editions/:number", { id: ensembleId, number })}
          aria-label={`Edition ${number}`}
        >
          {number}
        </TextLink>
      </Td>
      <Td>
        {formatDateShort(edition.frozenAt)}
        <span className="text-ink-3 max-sm:hidden">, {formatTime(edition.frozenAt)}</span>
      </Td>
      <Td className="max-xl:hidden">{edition.by ?? "Lowlying"}</Td>
      <Td wrap className="max-sm:hidden">
        {edition.title ? <span className="block font-medium">{edition.title}</span> : null}
        <span className="text-ink-2">{edition.changed.join("; ")}</span>
      </Td>
      <Td align="right" className="max-md:hidden">
        {edition.liveLinks}
      </Td>
      <Td>
        {edition.verifying?.state === "queued" || edition.verifying?.state === "running" ? (
          <span className="text-ink-3">recomputing</span>
        ) : edition.verified === null ? (
          mayShare ? (
            <>
              <Form method="post" preventScrollReset className="print:hidden">
                <input type="hidden" name="intent" value="verify" />
                <input type="hidden" name="number" value={edition.number} />
                <button type="submit" className={linkClass}>
                  verify<span className="sr-only"> edition {number}</span>
                </button>
              </Form>
              <span className="hidden text-ink-3 print:inline">not yet</span>
            </>
          ) : (
            <span className="text-ink-3">not yet</span>
          )
        ) : (
          <Badge tone={edition.verified.same ? "good" : "danger"}>
            {formatMoment(edition.verified.at, now)}
          </Badge>
        )}
      </Td>
    </Tr>
  );
}

/** Two editions beside each other, by address: it works without script and can be sent on. */
function CompareForm({ editions }: { editions: readonly EditionRow[] }) {
  const { search } = useLocation();
  const kept = [...new URLSearchParams(search)].filter(([name]) => name !== "from" && name !== "to");
  const choices = editions.map(({ number, title }) => ({
    value: String(number),
    label: title ? `${number}, ${title}` : `edition ${number}`,
  }));
  return (
    <Form method="get" preventScrollReset className="mt-4 flex flex-wrap items-end gap-3">
      {kept.map(([name, value]) => (
        <input key={name} type="hidden" name={name} value={value} />
      ))}
      <SelectField
        label="Compare"
        name="from"
        choices={choices}
        defaultValue={choices[1]?.value}
        className="w-44"
      />
      <SelectField
        label="with"
        name="to"
        choices={choices}
        defaultValue={choices[0]?.value}
        className="w-44"
      />
      <Button type="submit">Compare two</Button>
    </Form>
  );
}
