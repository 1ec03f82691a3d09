import { Check } from "lucide-react";
import { Table, Td, Th, Tr } from "~/components/ui/table";

const ROWS: readonly { act: string; owner: boolean; analyst: boolean; reader: boolean }[] = [
  { act: "See and download", owner: true, analyst: true, reader: true },
  { act: "Write remarks", owner: true, analyst: true, reader: true },
  { act: "Take in, compute", owner: true, analyst: true, reader: false },
  { act: "Freeze, make links", owner: true, analyst: true, reader: false },
  { act: "People, delete", owner: true, analyst: false, reader: false },
];

/** Who may do what, by role. */
export function RoleTable() {
  return (
    <section>
      <h2 className="mb-2 text-base font-semibold">Who may do what</h2>
      <Table aria-label="Who may do what">
        <thead>
          <tr>
            <Th className="pl-0!">
              <span className="sr-only">Act</span>
            </Th>
            <Th align="center">Owner</Th>
            <Th align="center">Analyst</Th>
            <Th align="center">Reader</Th>
          </tr>
        </thead>
        <tbody>
          {ROWS.map((row) => (
            <Tr key={row.act}>
              <Td className="pl-0!">{row.act}</Td>
              <Cell may={row.owner} />
              <Cell may={row.analyst} />
              <Cell may={row.reader} />
            </Tr>
          ))}
        </tbody>
      </Table>
    </section>
  );
}

function Cell({ may }: { may: boolean }) {
  return (
    <Td align="center">
      {may ? (
        <>
          <Check aria-hidden="true" className="inline size-4 text-good" />
          <span className="sr-only">yes</span>
        </>
      ) : (
        <span className="text-ink-3">no</span>
      )}
    </Td>
  );
}
