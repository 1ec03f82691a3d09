import { useVirtualizer } from "@tanstack/react-virtual";
import { ChevronDown, ChevronRight, Copy, Download } from "lucide-react";
import { type MouseEvent, memo, useCallback, useId, useMemo, useRef, useState } from "react";
import { flushSync } from "react-dom";
import { href, useLocation } from "react-router";
import { Button, buttonClass, IconButton } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { FilterSelect } from "~/components/ui/select-field";
import { Skeleton } from "~/components/ui/skeleton";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import { setHovered } from "~/hooks/use-hovered";
import { usePrinting } from "~/hooks/use-printing";
import {
  ABSENT,
  fixed,
  formatAngle,
  formatCount,
  formatDistance,
  formatEnergy,
  formatPopulation,
  formatRmsd,
  plural,
} from "~/lib/format";
import type { MeasureKind } from "~/lib/measure/measure";
import { searchOf, writeState } from "~/lib/url-state";
import type { ConformerRow } from "~/lib/workbench/conformers";
import { batchesCell } from "~/lib/workbench/found-by";
import { type SortColumn, sortRows } from "~/lib/workbench/sort-rows";
import { toTsv } from "~/lib/workbench/tsv";
import { FoundBySelect } from "./found-by-select";
import { PopulationBar } from "./population-bar";
import { useRowFocus } from "./table-grid";
import type { FoundByFilter } from "./use-found-by";
import type { ShapeColumn } from "./use-shape";
import { useWorkbench } from "./workbench-context";

/** Rows before "show all": what matters is among them, and the page stays short. */
const FIRST_ROWS = 12;
/** On paper; the last row counts what is left. */
const PRINTED_ROWS = 500;
const ROW_PX = 36;
const ROW_PX_TOUCH = 44;

export interface MeasureColumn {
  kind: MeasureKind;
  /** "C3–C4–N5–S6" */
  label: string;
  /** By position in the set; null where undefined or not fetched. */
  values: readonly (number | null)[];
}

/** The distinct set: energies, populations, copies, what was found, and how far each lies from the selected one. */
export function ConformerTable({
  measure,
  shape = null,
  foundBy = null,
}: {
  measure: MeasureColumn | null;
  /** Which search found what, where there were several. */
  foundBy?: FoundByFilter | null;
  /** Labels by chosen torsions, which the table can be narrowed to. */
  shape?: ShapeColumn | null;
}) {
  const { rows, sift, state, change, selected, select, column, reference, level, measured } = useWorkbench();
  const [all, setAll] = useState(false);
  const id = useId();
  const rmsd = useMemo(
    () => (column ? Array.from(column.rmsd, (value, k) => (k < column.known ? value : undefined)) : null),
    [column],
  );
  const only = shape?.only ?? null;
  const labels = shape?.labels;
  const shows = foundBy === null || foundBy.chosen === null ? null : foundBy.shows;
  const narrowed = useMemo(
    () =>
      only === null && shows === null
        ? rows
        : rows.filter(
            (row) => (only === null || labels?.[row.index] === only) && (shows === null || shows(row)),
          ),
    [rows, only, labels, shows],
  );
  const narrowedTo = [only, foundBy?.words].filter(Boolean).join(", ");
  const sorted = useMemo(
    () => sortRows(narrowed, state.sort, { rmsd, measure: measure?.values ?? null }),
    [narrowed, state.sort, rmsd, measure],
  );
  const order = useMemo(() => sorted.map((row) => row.frame), [sorted]);
  const widest = useMemo(() => rows.reduce((most, row) => Math.max(most, row.population ?? 0), 0), [rows]);
  const printing = usePrinting();
  const most = printing ? PRINTED_ROWS : all ? sorted.length : FIRST_ROWS;
  const shown = Math.min(most, sorted.length);
  const rest = useMemo(() => sorted.slice(shown), [sorted, shown]);
  const chosen = useMemo(() => new Set(selected), [selected]);

  const box = useRef<HTMLDivElement>(null);
  const [rowPx] = useState(rowHeight);
  const virtual = useVirtualizer({
    count: shown,
    getScrollElement: () => box.current,
    estimateSize: () => rowPx,
    overscan: 12,
    initialRect: { width: 900, height: FIRST_ROWS * ROW_PX },
    getItemKey: (index) => sorted[index]?.frame ?? index,
  });
  const scrollTo = useCallback(
    (index: number) => {
      // At once: the list has to be long enough before it can be scrolled there.
      if (index >= FIRST_ROWS) flushSync(() => setAll(true));
      virtual.scrollToIndex(index, { align: "auto" });
    },
    [virtual],
  );
  const onChoose = useCallback<ChooseRow>(
    (index, how) => {
      const frame = order[index];
      if (frame !== undefined) select(frame, how, order);
    },
    [order, select],
  );
  const { active, setActive, body, onKeyDown } = useRowFocus({ count: sorted.length, scrollTo, onChoose });
  const virtualItems = virtual.getVirtualItems();
  const items = printing
    ? sorted.slice(0, shown).map((_, index) => index)
    : virtualItems.map((item) => item.index);
  const before = printing ? 0 : (virtualItems[0]?.start ?? 0);
  const after = printing ? 0 : virtual.getTotalSize() - (virtualItems.at(-1)?.end ?? 0);

  const { search } = useLocation();
  const nextSort = (name: SortColumn) => {
    const now = state.sort?.column === name ? state.sort : name === "energy" && !state.sort ? NATURAL : null;
    const first = name === "population" || name === "found";
    return { column: name, descending: now ? !now.descending : first };
  };
  // Without energies the column of dashes orders nothing.
  const inFileOrder = level === null && (state.sort ?? NATURAL).column === "energy";
  const direction = (name: SortColumn) => {
    const now = state.sort ?? NATURAL;
    if (name === "energy" && inFileOrder) return null;
    return now.column === name ? (now.descending ? ("down" as const) : ("up" as const)) : null;
  };
  const heads = headsOf(measure, reference?.name ?? "c1", level !== null, foundBy !== null);

  const copy = async () => {
    try {
      await navigator.clipboard.writeText(tableText(sorted, rmsd, measure, reference?.name ?? "c1"));
      showToast({
        tone: "done",
        badge: "copied",
        text: `${plural(sorted.length, "row")}, every digit, as tab-separated text.`,
      });
    } catch {
      showToast({ tone: "failed", text: "The browser did not allow copying. Take the CSV instead." });
    }
  };

  return (
    <section aria-labelledby={id} className="mt-9">
      <BlockHead
        id={id}
        title={
          narrowedTo === ""
            ? plural(rows.length, "conformer")
            : `${formatCount(narrowed.length)} of ${plural(rows.length, "conformer")}: ${narrowedTo}`
        }
      >
        {foundBy ? <FoundBySelect foundBy={foundBy} /> : null}
        {shape ? (
          <FilterSelect
            label={`Shape by ${shape.words}`}
            active={only !== null}
            className="print:hidden noscript:hidden"
            value={only ?? ""}
            onChange={(event) => shape.narrow(event.currentTarget.value || null)}
            choices={[
              { value: "", label: "Shape: any" },
              ...shape.kinds.map(({ label, count }) => ({ value: label, label: `${label} (${count})` })),
            ]}
          />
        ) : null}
        <Button size="sm" icon={<Copy aria-hidden="true" />} onClick={copy}>
          Copy
        </Button>
        {sift ? (
          <a
            className={buttonClass({ size: "sm" })}
            href={`${href("/files/sifts/:id/export.csv", { id: sift.id })}?temperature=${state.temperatureK}`}
            download
          >
            <Download aria-hidden="true" />
            CSV
          </a>
        ) : null}
      </BlockHead>
      <p className="sr-only" role="status">
        {inFileOrder ? "In file order." : sortWords(state.sort ?? NATURAL, heads)}
      </p>
      {/* The box scrolls only when all rows are asked for; before, the page does. */}
      <div
        ref={box}
        className={`relative -mx-4 px-4 sm:mx-0 sm:px-0 ${all && !printing ? "max-h-[min(70vh,44rem)] overflow-y-auto" : ""}`}
      >
        <Table
          role="grid"
          tabIndex={-1}
          className="outline-none"
          aria-labelledby={id}
          aria-rowcount={sorted.length + 1}
          aria-multiselectable="true"
          onKeyDown={onKeyDown}
        >
          <thead className="sticky top-0 z-1 bg-paper">
            <tr aria-rowindex={1}>
              {heads.map((head) => (
                <Th
                  key={head.name}
                  unit={head.unit}
                  align={head.align}
                  sort={direction(head.name)}
                  onSort={() => change({ sort: nextSort(head.name) })}
                  sortTo={searchOf(
                    writeState({ ...state, sort: nextSort(head.name) }, new URLSearchParams(search)),
                  )}
                  className={head.className}
                >
                  {head.label}
                </Th>
              ))}
            </tr>
          </thead>
          <tbody ref={body}>
            {before > 0 ? <Spacer height={before} /> : null}
            {items.map((index) => {
              const row = sorted[index];
              return row ? (
                <ConformerLine
                  key={row.frame}
                  row={row}
                  index={index}
                  widest={widest}
                  rmsd={row.index === column?.reference ? null : (rmsd?.[row.index] ?? undefined)}
                  awaited={measured.has(row.frame)}
                  bound={column?.exact[row.index] === 0 && (rmsd?.[row.index] ?? undefined) !== undefined}
                  measure={measure}
                  shape={labels?.[row.index] ?? null}
                  batches={foundBy && row.batches ? batchesCell(row.batches, foundBy.of) : null}
                  selected={chosen.has(row.frame)}
                  tabbed={index === active}
                  onFocus={setActive}
                  onChoose={onChoose}
                />
              ) : null;
            })}
            {after > 0 ? <Spacer height={after} /> : null}
          </tbody>
          <tfoot className="print:table-row-group">
            <SumRow rest={rest} rows={narrowed} batches={foundBy !== null} />
          </tfoot>
        </Table>
      </div>
      {sorted.length > FIRST_ROWS ? (
        <p className="mt-2 hidden text-xs text-ink-3 noscript:block">All of them stand in the CSV.</p>
      ) : null}
      {sorted.length > FIRST_ROWS ? (
        <p className="mt-2 text-xs">
          <TextButton onClick={() => setAll(!all)}>
            {all ? `Show the first ${FIRST_ROWS} only` : `Show all ${formatCount(sorted.length)}`}
          </TextButton>
        </p>
      ) : null}
    </section>
  );
}

type ChooseRow = (index: number, how: "only" | "add" | "extend") => void;

const NATURAL = { column: "energy", descending: false } as const;

function rowHeight(): number {
  if (typeof window === "undefined") return ROW_PX;
  return window.matchMedia("(pointer: coarse), (max-width: 639px)").matches ? ROW_PX_TOUCH : ROW_PX;
}

interface Head {
  name: SortColumn;
  label: string;
  unit?: string;
  align: "left" | "right";
  className?: string;
}

const WIDE = "max-xl:hidden";
const MID = "max-sm:hidden";

function headsOf(
  measure: MeasureColumn | null,
  reference: string,
  weighed: boolean,
  batches: boolean,
): Head[] {
  const heads: Head[] = [
    { name: "conformer", label: "Conformer", align: "left" },
    { name: "frame", label: "Frame", align: "right", className: MID },
    { name: "energy", label: "Relative energy", unit: "kcal/mol", align: "right" },
    {
      name: "population",
      label: "Population",
      unit: "%, bar on one scale",
      align: "left",
      className: "w-1/4",
    },
    { name: "degeneracy", label: "Degeneracy", align: "right", className: MID },
    { name: "symmetry", label: "Symmetry", unit: "number", align: "right", className: WIDE },
    { name: "found", label: "Found", unit: "times", align: "right", className: MID },
    ...(batches
      ? [
          {
            name: "batches" as const,
            label: "Found by",
            unit: "batch",
            align: "left" as const,
            className: MID,
          },
        ]
      : []),
    {
      name: "rmsd",
      label: `RMSD to ${reference}`,
      unit: "Å",
      align: "right",
      className: `${WIDE} noscript:hidden`,
    },
  ];
  if (measure) {
    heads.push({
      name: "measure",
      label: measure.label,
      unit: measure.kind === "distance" ? "Å" : "°",
      align: "right",
      className: WIDE,
    });
  }
  return weighed ? heads : heads.filter((head) => head.name !== "population");
}

function sortWords(sort: { column: string; descending: boolean }, heads: readonly Head[]): string {
  const head = heads.find((one) => one.name === sort.column);
  return head ? `Sorted by ${head.label}, ${sort.descending ? "falling" : "rising"}.` : "";
}

/** Stands for rows that are not in the page. A height attribute needs no style. */
function Spacer({ height }: { height: number }) {
  return (
    // biome-ignore lint/a11y/noAriaHiddenOnFocusable: it is no control and takes no focus
    <tr aria-hidden="true">
      <td height={height} colSpan={10} className="p-0" />
    </tr>
  );
}

const ConformerLine = memo(function ConformerLine({
  row,
  index,
  widest,
  rmsd,
  awaited,
  bound,
  measure,
  shape,
  batches,
  selected,
  tabbed,
  onFocus,
  onChoose,
}: {
  row: ConformerRow;
  index: number;
  widest: number;
  /** Null for the reference itself, undefined while it is not known. */
  rmsd: number | null | undefined;
  /** It will be known. */
  awaited: boolean;
  bound: boolean;
  measure: MeasureColumn | null;
  /** Label by chosen torsions. */
  shape: string | null;
  /** Which batches found it: "1, 2"; null where there was one. */
  batches: string | null;
  selected: boolean;
  tabbed: boolean;
  onFocus: (index: number) => void;
  onChoose: ChooseRow;
}) {
  const [open, setOpen] = useState(false);
  const click = (event: MouseEvent) => {
    if ((event.target as HTMLElement).closest("button")) return;
    onChoose(index, event.shiftKey ? "extend" : event.ctrlKey || event.metaKey ? "add" : "only");
  };
  const value = measure?.values[row.index] ?? null;
  const rmsdText = rmsd === null || rmsd === undefined ? ABSENT : `${bound ? "to " : ""}${formatRmsd(rmsd)}`;
  const measureText =
    measure === null ? "" : measure.kind === "distance" ? formatDistance(value) : formatAngle(value);
  return (
    <>
      <Tr
        data-row={index}
        aria-rowindex={index + 2}
        selected={selected}
        tabIndex={tabbed ? 0 : -1}
        className={`scroll-mt-14 cursor-pointer select-none hover:bg-sunk ${row.outside ? "text-ink-2" : ""} ${selected ? "hover:bg-mark-wash" : ""}`}
        onFocus={() => onFocus(index)}
        onClick={click}
        onMouseDown={(event) => event.shiftKey && event.preventDefault()}
        onPointerEnter={() => setHovered(row.frame)}
        onPointerLeave={() => setHovered(null)}
      >
        <Td>
          <span className="flex items-center gap-1">
            <IconButton
              label={`${open ? "Less" : "More"} of ${row.name}`}
              aria-expanded={open}
              className="-ml-2 xl:hidden"
              onClick={() => setOpen(!open)}
            >
              {open ? <ChevronDown aria-hidden="true" /> : <ChevronRight aria-hidden="true" />}
            </IconButton>
            <b className="font-semibold">{row.name}</b>
            {shape === null ? null : <span className="ml-1 text-xs text-ink-3">{shape}</span>}
          </span>
        </Td>
        <Td align="right" className={MID}>
          {row.frame}
        </Td>
        <Td align="right">{formatEnergy(row.relativeEnergy)}</Td>
        {row.population === null ? null : (
          <Td>
            <span className="flex items-center gap-3">
              <span className="w-9 shrink-0 text-right">{formatPopulation(row.population)}</span>
              <span className="min-w-10 flex-1">
                <PopulationBar population={row.population} widest={widest} />
              </span>
            </span>
          </Td>
        )}
        <Td align="right" className={MID}>
          {row.degeneracy}
        </Td>
        <Td align="right" className={WIDE}>
          {row.symmetryNumber ?? ABSENT}
        </Td>
        <Td align="right" className={MID}>
          <span title={row.foundIn ?? undefined}>{row.found}</span>
        </Td>
        {batches === null ? null : <Td className={`${MID} whitespace-nowrap`}>{batches}</Td>}
        <Td align="right" className={`${WIDE} noscript:hidden`}>
          {rmsd === undefined && awaited ? <Skeleton className="ml-auto h-3 w-9" /> : rmsdText}
        </Td>
        {measure ? (
          <Td align="right" className={WIDE}>
            {measureText}
          </Td>
        ) : null}
      </Tr>
      {open ? (
        <tr className="border-b border-rule bg-sunk xl:hidden">
          <td colSpan={10} className="px-4 py-3">
            <dl className="figures grid grid-cols-[auto_1fr] gap-x-4 gap-y-1 [&_dt]:text-ink-3">
              <dt>frame</dt>
              <dd>{row.frame}</dd>
              <dt>degeneracy</dt>
              <dd>{row.degeneracy}</dd>
              <dt>symmetry number</dt>
              <dd>{row.symmetryNumber ?? "not counted: the bound on the work was met"}</dd>
              <dt>copies</dt>
              <dd>
                {row.copies === null ? ABSENT : fixed(row.copies, Number.isInteger(row.copies) ? 0 : 2)}
              </dd>
              <dt>found</dt>
              <dd>
                {plural(row.found, "time")}
                {row.foundIn ? ` (${row.foundIn})` : ""}
              </dd>
              <dt>RMSD to its mirror image</dt>
              <dd>{formatRmsd(row.mirrorRmsd)} Å</dd>
              <dt>RMSD to the selected</dt>
              <dd>{rmsd === null ? "itself" : rmsd === undefined ? "not computed yet" : `${rmsdText} Å`}</dd>
              {measure ? (
                <>
                  <dt>{measure.label}</dt>
                  <dd>
                    {measureText} {measure.kind === "distance" ? "Å" : "°"}
                  </dd>
                </>
              ) : null}
            </dl>
          </td>
        </tr>
      ) : null}
    </>
  );
});

/** What is not shown, summed; all of it once everything is. */
const SumRow = memo(function SumRow({
  rest,
  rows,
  batches,
}: {
  rest: readonly ConformerRow[];
  rows: readonly ConformerRow[];
  /** There is a column of them. */
  batches: boolean;
}) {
  const over = rest.length > 0 ? rest : rows;
  const share = over.reduce((sum, row) => sum + (row.population ?? 0), 0);
  const energies = over.flatMap((row) => (row.relativeEnergy === null ? [] : [row.relativeEnergy]));
  const low = energies.reduce((least, energy) => Math.min(least, energy), Number.POSITIVE_INFINITY);
  const high = energies.reduce((most, energy) => Math.max(most, energy), Number.NEGATIVE_INFINITY);
  return (
    <tr className="border-b border-rule text-ink-2">
      <Td>{rest.length > 0 ? `${formatCount(rest.length)} more` : `all ${formatCount(rows.length)}`}</Td>
      <Td className={MID} />
      <Td align="right">
        {energies.length === 0
          ? ""
          : low === high
            ? formatEnergy(low)
            : `${formatEnergy(low)} to ${formatEnergy(high)}`}
      </Td>
      {over[0]?.population === null ? null : (
        <Td>
          <span className="flex items-center gap-3">
            <span className="w-9 shrink-0 text-right">{formatPopulation(share)}</span>
            <span>together</span>
          </span>
        </Td>
      )}
      <Td className={MID} />
      <Td className={WIDE} />
      <Td align="right" className={MID}>
        {formatCount(over.reduce((sum, row) => sum + row.found, 0))}
      </Td>
      {batches ? <Td className={MID} /> : null}
      <Td className={WIDE} colSpan={2} />
    </tr>
  );
});

function tableText(
  rows: readonly ConformerRow[],
  rmsd: readonly (number | undefined)[] | null,
  measure: MeasureColumn | null,
  reference: string,
): string {
  const several = rows.some(({ foundIn }) => foundIn);
  const header = [
    "conformer",
    "frame",
    "relative energy [kcal/mol]",
    "population [%]",
    "degeneracy",
    "symmetry number",
    "copies",
    "found",
    ...(several ? ["found by"] : []),
    "RMSD to its mirror image [Å]",
    ...(rmsd ? [`RMSD to ${reference} [Å]`] : []),
    ...(measure ? [`${measure.label} [${measure.kind === "distance" ? "Å" : "°"}]`] : []),
  ];
  return toTsv(
    header,
    rows.map((row) => [
      row.name,
      row.frame,
      row.relativeEnergy,
      row.population === null ? null : 100 * row.population,
      row.degeneracy,
      row.symmetryNumber,
      row.copies,
      row.found,
      ...(several ? [row.foundIn ?? null] : []),
      row.mirrorRmsd,
      ...(rmsd ? [rmsd[row.index] ?? null] : []),
      ...(measure ? [measure.values[row.index] ?? null] : []),
    ]),
  );
}
