import { useEffect, useState } from "react";
import { Badge } from "~/components/ui/badge";
import { Checkbox } from "~/components/ui/checkbox";
import { TextField } from "~/components/ui/field";
import { BlockHead } from "~/components/ui/finding";
import { SelectField } from "~/components/ui/select-field";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import type { ColumnsPreview } from "~/lib/api/schemas";
import { formatCount } from "~/lib/format";
import { ScrollBox } from "./scroll-box";
import type { ColumnChoiceField } from "./send-columns";

type Planned = ColumnsPreview["columns"][number];

/** The first rows as they stand in the file. */
export function FirstRows({ preview }: { preview: ColumnsPreview }) {
  if (preview.rows.length === 0) return null;
  const width = Math.max(preview.header.length, ...preview.rows.map((row) => row.length));
  const heads = Array.from({ length: width }, (_, k) => preview.header[k] || `column ${k + 1}`);
  return (
    <section className="mt-6">
      <BlockHead title={`The first rows, separated by a ${preview.delimiter}`} />
      <ScrollBox label="First rows">
        <Table aria-label="The first rows of the file" className="figures">
          <thead>
            <tr>
              {heads.map((head, k) => (
                <Th key={k}>{head}</Th>
              ))}
            </tr>
          </thead>
          <tbody>
            {preview.rows.slice(0, 5).map((row, r) => (
              <Tr key={r}>
                {heads.map((_, k) => (
                  <Td key={k}>{row[k] ?? ""}</Td>
                ))}
              </Tr>
            ))}
          </tbody>
        </Table>
      </ScrollBox>
    </section>
  );
}

/** What each column is taken as, to be corrected where it is wrong. */
export function TakenAs({
  preview,
  choices,
  onDecide,
}: {
  preview: ColumnsPreview;
  choices: readonly ColumnChoiceField[];
  onDecide: (choice: ColumnChoiceField) => void;
}) {
  const unused = choices.filter(({ use }) => use === false).map(({ column }) => column);
  const left = preview.leftOut.filter(({ column }) => column === null || !unused.includes(column));
  return (
    <section className="mt-6">
      <BlockHead title="What each column is taken as" />
      <ScrollBox label="Columns of the file">
        <Table aria-label="What each column is taken as">
          <thead>
            <tr>
              <Th>Header</Th>
              <Th>Name</Th>
              <Th>Kind</Th>
              <Th>Unit</Th>
              <Th align="right">Frames</Th>
            </tr>
          </thead>
          <tbody>
            {preview.columns.map((column) => (
              <PlannedRow key={column.column ?? column.name} column={column} onDecide={onDecide} />
            ))}
            {unused.map((column) => (
              <Tr key={column}>
                <Td tall colSpan={5} wrap>
                  <Checkbox checked={false} onChange={() => onDecide({ column, use: true })}>
                    <span className="text-ink-3">
                      {preview.header[column - 1] || `column ${column}`}: not wanted
                    </span>
                  </Checkbox>
                </Td>
              </Tr>
            ))}
          </tbody>
        </Table>
      </ScrollBox>
      {left.length > 0 ? (
        <p className="mt-2 max-w-read text-xs text-ink-3">
          Left out: {left.map(({ header, why }) => `${header} (${why})`).join(", ")}.
        </p>
      ) : null}
    </section>
  );
}

function PlannedRow({
  column,
  onDecide,
}: {
  column: Planned;
  onDecide: (choice: ColumnChoiceField) => void;
}) {
  const number = column.column;
  if (number === null) {
    return (
      <Tr>
        <Td tall>{column.header}</Td>
        <Td>{column.name}</Td>
        <Td>{column.kind === "energy" ? "a level" : "a property"}</Td>
        <Td>{column.unit ?? "none"}</Td>
        <Td align="right" className="figures">
          {formatCount(column.count)}
        </Td>
      </Tr>
    );
  }
  return (
    <Tr>
      <Td tall wrap className="min-w-32">
        <Checkbox checked onChange={() => onDecide({ column: number, use: false })}>
          <span className="break-words">{column.header}</span>
        </Checkbox>
      </Td>
      <Td className="min-w-40">
        <Draft
          label={`Name of ${column.header}`}
          value={column.name}
          onSettle={(name) => onDecide({ column: number, name })}
        />
        {column.exists ? (
          <span className="mt-1 block">
            <Badge tone="remark">there already</Badge>
          </span>
        ) : null}
      </Td>
      <Td className="min-w-32">
        <SelectField
          label={`Kind of ${column.header}`}
          hideLabel
          value={column.kind}
          choices={[
            { value: "energy", label: "Energy: a level" },
            { value: "property", label: "Property" },
          ]}
          onChange={(event) =>
            onDecide({ column: number, kind: event.currentTarget.value === "energy" ? "energy" : "property" })
          }
        />
        {column.atom === null ? null : (
          <span className="mt-1 block text-xs text-ink-3">
            atom {column.atom}, {column.quantity}
          </span>
        )}
      </Td>
      <Td className="min-w-28">
        <Draft
          label={`Unit of ${column.header}`}
          value={column.unit ?? ""}
          placeholder="none"
          empty
          onSettle={(unit) => onDecide({ column: number, unit })}
        />
      </Td>
      <Td align="right" className="figures">
        {formatCount(column.count)}
      </Td>
    </Tr>
  );
}

/** A text that counts once it is left or Enter is pressed. */
function Draft({
  label,
  value,
  placeholder,
  empty = false,
  onSettle,
}: {
  label: string;
  value: string;
  placeholder?: string;
  empty?: boolean;
  onSettle: (text: string) => void;
}) {
  const [text, setText] = useState(value);
  useEffect(() => setText(value), [value]);
  const settle = () => {
    const plain = text.trim();
    if (plain === value) return;
    if (plain === "" && !empty) setText(value);
    else onSettle(plain);
  };
  return (
    <TextField
      label={label}
      hideLabel
      value={text}
      placeholder={placeholder}
      maxLength={120}
      autoComplete="off"
      spellCheck={false}
      onChange={(event) => setText(event.currentTarget.value)}
      onBlur={settle}
      onKeyDown={(event) => {
        if (event.key !== "Enter") return;
        event.preventDefault();
        settle();
      }}
    />
  );
}
