import { type ReactNode, useId, useRef, useState } from "react";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { fixed } from "~/lib/format";
import { toCsv } from "~/lib/workbench/tsv";
import { type FigureContext, figureJson, figureSvg, savePng, saveText, withFacts } from "./export-figure";
import { useFigureFacts } from "./figure-facts";

export interface FigureColumn {
  name: string;
  unit?: string;
  /** Decimals on the page; the CSV has every digit. Words where left out. */
  digits?: number;
}

/** The numbers behind a figure: what the table shows and the CSV holds. */
export interface FigureData {
  columns: readonly FigureColumn[];
  rows: readonly (readonly (string | number | null)[])[];
}

/** Small words, but targets of 24 px, 44 where the pointer is coarse. */
const TOOL =
  "inline-flex min-h-6 min-w-6 items-center justify-center no-underline! hover:underline! pointer-coarse:min-h-11 pointer-coarse:min-w-11";
const ROWS_WITHOUT_SCRIPT = 200;
const ROWS_SHOWN = 500;

/** Title, what is drawn, and the same numbers as a table, as CSV and JSON, and the drawing as an SVG or PNG file. */
export function ChartFrame({
  title,
  data,
  fileName,
  note,
  tableBeside = false,
  ofPopulations = true,
  className = "",
  children,
}: {
  title: string;
  data: FigureData;
  /** Without ending; letters, digits and hyphens. */
  fileName: string;
  note?: ReactNode;
  /** The page has these numbers in a table of its own, so that readers without script need no second one. */
  tableBeside?: boolean;
  /** False where neither temperature nor weights bear on it. */
  ofPopulations?: boolean;
  className?: string;
  children: ReactNode;
}) {
  const id = useId();
  const figure = useRef<HTMLDivElement>(null);
  const [open, setOpen] = useState(false);
  const facts = useFigureFacts();
  const context = (): FigureContext => ({
    facts: ofPopulations ? facts() : [],
    note: typeof note === "string" ? note : undefined,
  });
  const saveCsv = () => {
    const table = withFacts(head, data.rows, context().facts);
    saveText(`${fileName}.csv`, "text/csv", toCsv(table.head, table.rows));
  };
  const head = data.columns.map((column) => (column.unit ? `${column.name} [${column.unit}]` : column.name));
  return (
    <figure className={`min-w-0 ${className}`} aria-labelledby={id}>
      <figcaption className="mb-2 flex flex-wrap items-baseline justify-between gap-x-3">
        <h3 id={id} className="text-sm font-semibold">
          {title}
        </h3>
        <span className="-my-1 flex flex-wrap gap-x-2 text-xs pointer-coarse:gap-x-0">
          <TextButton
            className={TOOL}
            aria-expanded={open}
            aria-controls={`${id}-table`}
            onClick={() => setOpen(!open)}
          >
            Table<span className="sr-only"> of {title}</span>
          </TextButton>
          <TextButton className={TOOL} onClick={saveCsv}>
            CSV<span className="sr-only"> of {title}</span>
          </TextButton>
          <TextButton
            className={TOOL}
            onClick={() => {
              const svg = figure.current?.querySelector("svg");
              if (svg) saveText(`${fileName}.svg`, "image/svg+xml", figureSvg(svg, title, context()));
            }}
          >
            SVG<span className="sr-only"> of {title}</span>
          </TextButton>
          <TextButton
            className={TOOL}
            onClick={() => {
              const svg = figure.current?.querySelector("svg");
              if (svg) void savePng(`${fileName}.png`, svg, title, context());
            }}
          >
            PNG<span className="sr-only"> of {title}</span>
          </TextButton>
          <TextButton
            className={TOOL}
            onClick={() =>
              saveText(`${fileName}.json`, "application/json", figureJson(title, data, context()))
            }
          >
            JSON<span className="sr-only"> of {title}</span>
          </TextButton>
        </span>
      </figcaption>
      <div ref={figure} className="noscript:hidden">
        {children}
      </div>
      {note ? <p className="mt-1 text-xs text-ink-3">{note}</p> : null}
      <div id={`${id}-table`} hidden={!open} className="print:hidden mt-3 max-h-80 overflow-auto">
        {open ? <FigureTable data={data} title={title} most={ROWS_SHOWN} /> : null}
      </div>
      {tableBeside ? null : (
        <noscript>
          <FigureTable data={data} title={title} most={ROWS_WITHOUT_SCRIPT} />
        </noscript>
      )}
    </figure>
  );
}

function FigureTable({ data, title, most }: { data: FigureData; title: string; most: number }) {
  const rest = data.rows.length - most;
  return (
    <>
      <Table aria-label={title}>
        <thead>
          <tr>
            {data.columns.map((column) => (
              <Th key={column.name} unit={column.unit} align={column.digits === undefined ? "left" : "right"}>
                {column.name}
              </Th>
            ))}
          </tr>
        </thead>
        <tbody>
          {data.rows.slice(0, most).map((row, k) => (
            <Tr key={k}>
              {row.map((cell, c) => {
                const digits = data.columns[c]?.digits;
                return (
                  <Td key={c} align={digits === undefined ? "left" : "right"}>
                    {typeof cell === "number" ? fixed(cell, digits ?? 0) : (cell ?? fixed(null, 0))}
                  </Td>
                );
              })}
            </Tr>
          ))}
        </tbody>
      </Table>
      {rest > 0 ? <p className="mt-2 text-xs text-ink-3">{rest} more rows in the CSV.</p> : null}
    </>
  );
}
