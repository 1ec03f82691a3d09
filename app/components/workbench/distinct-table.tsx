import { useVirtualizer } from "@tanstack/react-virtual";
import { ChevronDown, ChevronRight } from "lucide-react";
import {
  type MouseEvent,
  type ReactNode,
  useCallback,
  useEffect,
  useId,
  useLayoutEffect,
  useMemo,
  useRef,
  useState,
} from "react";
import { flushSync } from "react-dom";
import { DegeneracyBadge } from "~/components/ui/badge";
import { IconButton } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { setHovered } from "~/hooks/use-hovered";
import { usePrinting } from "~/hooks/use-printing";
import { formatCount, formatEnergy, formatRmsd, plural } from "~/lib/format";
import type { DroppedFrame } from "~/lib/recipe/result";
import type { ConformerRow } from "~/lib/workbench/conformers";
import { repeatsOf } from "~/lib/workbench/repeats";
import { FoundBySelect } from "./found-by-select";
import { useRowFocus } from "./table-grid";
import { useExchanged } from "./use-exchanged";
import type { FoundByFilter } from "./use-found-by";
import { useWorkbench } from "./workbench-context";

const FIRST_ROWS = 12;
/** On paper; a last row counts what is left. */
const PRINTED_ROWS = 500;
const FIRST_REPEATS = 7;
/** Exchanges that a row names before it counts the rest. */
const FIRST_EXCHANGES = 3;
/** px of a row, and of one that says which search found it; of what an opened row shows until it was measured. */
const ROW_HEIGHT = 36;
const TALL_ROW_HEIGHT = 53;
const OPENED_HEIGHT = 320;
const MID = "max-sm:hidden";
const NO_REPEATS: DroppedFrame[] = [];

/** Every kept conformer and, opened, the frames that repeat it: nothing was dropped without a reason. */
export function DistinctTable({
  tools,
  foundBy,
}: {
  tools: ReactNode;
  /** Which search found what, where there were several. */
  foundBy: FoundByFilter | null;
}) {
  const { rows: every, result, selected, select } = useWorkbench();
  const shows = foundBy === null || foundBy.chosen === null ? null : foundBy.shows;
  const rows = useMemo(() => (shows === null ? every : every.filter(shows)), [every, shows]);
  const id = useId();
  const [all, setAll] = useState(false);
  const [open, setOpen] = useState<ReadonlySet<number>>(new Set());
  const [heights, setHeights] = useState<ReadonlyMap<number, number>>(new Map());
  const repeats = useMemo(() => (result ? repeatsOf(result) : new Map<number, DroppedFrame[]>()), [result]);
  const order = useMemo(() => rows.map((row) => row.frame), [rows]);
  const chosen = new Set(selected);
  const most = rows.reduce((found, row) => Math.max(found, row.found), 1);
  const printing = usePrinting();
  const shown = Math.min(printing ? PRINTED_ROWS : all ? rows.length : FIRST_ROWS, rows.length);
  const box = useRef<HTMLDivElement>(null);
  const virtual = useVirtualizer({
    count: shown,
    getScrollElement: () => box.current,
    estimateSize: (index) => {
      const row = rows[index];
      if (!row) return ROW_HEIGHT;
      const opened = open.has(row.frame) ? (heights.get(row.frame) ?? OPENED_HEIGHT) : 0;
      return (row.foundIn ? TALL_ROW_HEIGHT : ROW_HEIGHT) + opened;
    },
    overscan: 12,
    initialRect: { width: 900, height: FIRST_ROWS * ROW_HEIGHT },
    getItemKey: (index) => rows[index]?.frame ?? index,
  });
  // biome-ignore lint/correctness/useExhaustiveDependencies: what is opened, and how tall it is, moves all rows below
  useEffect(() => virtual.measure(), [virtual, open, heights]);
  const onHeight = useCallback(
    (frame: number, height: number) =>
      setHeights((known) => (known.get(frame) === height ? known : new Map(known).set(frame, height))),
    [],
  );
  const scrollTo = useCallback(
    (index: number) => {
      // At once: the list has to be long enough before it can be scrolled there.
      if (index >= FIRST_ROWS) flushSync(() => setAll(true));
      virtual.scrollToIndex(index, { align: "auto" });
    },
    [virtual],
  );
  const toggle = (frame: number) => {
    const next = new Set(open);
    if (!next.delete(frame)) next.add(frame);
    setOpen(next);
  };
  const onChoose = (index: number, how: "only" | "add" | "extend") => {
    const row = rows[index];
    if (row) select(row.frame, how, order);
  };
  const { active, setActive, body, onKeyDown } = useRowFocus({ count: rows.length, scrollTo, onChoose });
  const virtualised = all && !printing;
  const items = virtualised
    ? virtual.getVirtualItems().map((item) => item.index)
    : Array.from({ length: shown }, (_, index) => index);
  const first = virtual.getVirtualItems()[0];
  const last = virtual.getVirtualItems().at(-1);
  const before = virtualised && first ? first.start : 0;
  const after = virtualised && last ? virtual.getTotalSize() - last.end : 0;
  const dropped = result?.dropped.length ?? 0;
  const conformers =
    shows === null
      ? plural(rows.length, "conformer")
      : `${formatCount(rows.length)} of ${plural(every.length, "conformer")}: ${foundBy?.words}`;
  return (
    <section aria-labelledby={id} className="mt-9">
      <BlockHead
        id={id}
        title={
          dropped > 0 && shows === null
            ? `${conformers} and ${rows.length === 1 ? "its" : "their"} ${plural(dropped, "repeat")}`
            : conformers
        }
      >
        {foundBy ? <FoundBySelect foundBy={foundBy} /> : null}
        {tools}
      </BlockHead>
      <div
        ref={box}
        className={`relative ${all && !printing ? "max-h-[min(70vh,44rem)] overflow-y-auto" : ""}`}
      >
        <Table
          role="grid"
          tabIndex={-1}
          className="outline-none"
          aria-labelledby={id}
          aria-rowcount={rows.length + 1}
          aria-multiselectable="true"
          onKeyDown={(event) => {
            const row = (event.target as HTMLElement).closest<HTMLElement>("[data-row]");
            const frame = row === event.target ? rows[Number(row?.dataset.row)]?.frame : undefined;
            const opens = event.key === "ArrowRight";
            if (frame !== undefined && (opens || event.key === "ArrowLeft") && open.has(frame) !== opens) {
              event.preventDefault();
              toggle(frame);
            } else onKeyDown(event);
          }}
        >
          <thead className="sticky top-0 z-1 bg-paper">
            <tr aria-rowindex={1}>
              <Th>Conformer</Th>
              <Th align="right" className={MID}>
                Frame
              </Th>
              <Th align="right" unit="kcal/mol" sort="up" className="max-[24rem]:whitespace-normal">
                Relative energy
              </Th>
              <Th align="right">Degeneracy</Th>
              <Th align="right" unit="RMSD, Å" className={MID}>
                To its mirror image
              </Th>
              <Th>Found</Th>
            </tr>
          </thead>
          <tbody ref={body}>
            {before > 0 ? <Space height={before} /> : null}
            {items.map((index) => {
              const row = rows[index];
              return row ? (
                <KeptRow
                  key={row.frame}
                  row={row}
                  index={index}
                  most={most}
                  repeats={repeats.get(row.frame) ?? NO_REPEATS}
                  open={open.has(row.frame)}
                  selected={chosen.has(row.frame)}
                  tabbed={index === active}
                  onToggle={() => toggle(row.frame)}
                  onHeight={onHeight}
                  onFocus={() => setActive(index)}
                  onChoose={onChoose}
                />
              ) : null;
            })}
            {after > 0 ? <Space height={after} /> : null}
          </tbody>
          {shown < rows.length ? (
            <tfoot className="print:table-row-group">
              <tr className="border-b border-rule text-ink-2">
                <Td colSpan={6}>{formatCount(rows.length - shown)} more</Td>
              </tr>
            </tfoot>
          ) : null}
        </Table>
      </div>
      {rows.length > FIRST_ROWS ? (
        <p className="mt-2 text-xs">
          <TextButton onClick={() => setAll(!all)}>
            {all ? `Show the first ${FIRST_ROWS} only` : `Show all ${formatCount(rows.length)}`}
          </TextButton>
        </p>
      ) : null}
    </section>
  );
}

function Space({ height }: { height: number }) {
  return (
    // biome-ignore lint/a11y/noAriaHiddenOnFocusable: it is no control and takes no focus
    <tr aria-hidden="true">
      <td height={height} colSpan={6} className="p-0" />
    </tr>
  );
}

function KeptRow({
  row,
  index,
  most,
  repeats,
  open,
  selected,
  tabbed,
  onToggle,
  onHeight,
  onFocus,
  onChoose,
}: {
  row: ConformerRow;
  index: number;
  most: number;
  repeats: readonly DroppedFrame[];
  open: boolean;
  selected: boolean;
  tabbed: boolean;
  onToggle: () => void;
  /** Of what is shown below it while it is open, px. */
  onHeight: (frame: number, height: number) => void;
  onFocus: () => void;
  onChoose: (index: number, how: "only" | "add" | "extend") => void;
}) {
  const click = (event: MouseEvent) => {
    if ((event.target as HTMLElement).closest("button")) return;
    onChoose(index, event.shiftKey ? "extend" : event.ctrlKey || event.metaKey ? "add" : "only");
  };
  return (
    <>
      <Tr
        data-row={index}
        aria-rowindex={index + 2}
        selected={selected}
        tabIndex={tabbed ? 0 : -1}
        className={`scroll-mt-14 cursor-pointer select-none hover:bg-sunk ${selected ? "hover:bg-mark-wash" : ""}`}
        onFocus={onFocus}
        onClick={click}
        onMouseDown={(event) => event.shiftKey && event.preventDefault()}
        onPointerEnter={() => setHovered(row.frame)}
        onPointerLeave={() => setHovered(null)}
      >
        <Td>
          <span className="flex items-center gap-1">
            {repeats.length > 0 ? (
              <IconButton
                label={`${plural(repeats.length, "repeat")} of ${row.name}`}
                aria-expanded={open}
                className="-ml-2"
                tabIndex={tabbed ? 0 : -1}
                onClick={onToggle}
              >
                {open ? <ChevronDown aria-hidden="true" /> : <ChevronRight aria-hidden="true" />}
              </IconButton>
            ) : (
              <span className="-ml-2 size-7 print:hidden pointer-coarse:size-11" />
            )}
            <b className="font-semibold">{row.name}</b>
          </span>
        </Td>
        <Td align="right" className={MID}>
          {row.frame}
        </Td>
        <Td align="right">{formatEnergy(row.relativeEnergy)}</Td>
        <Td align="right">
          <DegeneracyBadge value={row.degeneracy} />
        </Td>
        <Td align="right" className={MID}>
          {row.upperBound ? "to " : ""}
          {formatRmsd(row.mirrorRmsd)}
        </Td>
        <Td wrap={Boolean(row.foundIn)}>
          <span className="flex items-center gap-3">
            <span className="w-18 shrink-0 text-right max-sm:w-9 max-[24rem]:w-auto max-[24rem]:shrink">
              <span className={MID}>found </span>
              {row.found}×
            </span>
            <svg
              aria-hidden="true"
              width="100%"
              height="8"
              className="block min-w-8 max-w-32 overflow-visible max-[24rem]:hidden"
            >
              <rect
                x="0.5"
                y="0.5"
                width={`${(100 * row.found) / most}%`}
                height="7"
                className="fill-none stroke-edge"
              />
            </svg>
          </span>
          {row.foundIn ? (
            <span className="block text-xs text-ink-3">
              {row.batches?.length === 1 ? `batch ${row.batches[0]} only` : row.foundIn}
            </span>
          ) : null}
        </Td>
      </Tr>
      {open ? (
        <Opened onHeight={(height) => onHeight(row.frame, height)}>
          <Repeats row={row} repeats={repeats} />
        </Opened>
      ) : null}
    </>
  );
}

/** What an opened row shows; it tells how tall it is, so that the rows far below find their place. */
function Opened({ onHeight, children }: { onHeight: (height: number) => void; children: ReactNode }) {
  const row = useRef<HTMLTableRowElement>(null);
  const tell = useRef(onHeight);
  tell.current = onHeight;
  useLayoutEffect(() => {
    const element = row.current;
    if (!element) return;
    const watch = new ResizeObserver(() => tell.current(element.offsetHeight));
    watch.observe(element);
    return () => watch.disconnect();
  }, []);
  return (
    <tr ref={row} className="border-b border-rule bg-sunk">
      <td colSpan={6} className="px-3 py-4 sm:pr-3 sm:pl-3 xl:pr-4 xl:pl-9">
        {children}
      </td>
    </tr>
  );
}

/** It stays where it is once pressed, so that a reader who works by key goes on from there. */
function LayOver({ frame, laid, onLay }: { frame: number; laid: boolean; onLay: () => void }) {
  return (
    <TextButton aria-pressed={laid} className={laid ? "text-ink-3! no-underline" : ""} onClick={onLay}>
      {laid ? "Laid over" : "Lay over"}
      <span className="sr-only"> frame {frame}</span>
    </TextButton>
  );
}

/** The first exchanges of a repeat, the others when asked for; absent while the coordinates are on their way. */
function ExchangedCell({ exchanges }: { exchanges: readonly string[] | undefined }) {
  const [all, setAll] = useState(false);
  const more = (exchanges?.length ?? 0) - FIRST_EXCHANGES;
  const shown = more > 1 && !all ? exchanges?.slice(0, FIRST_EXCHANGES) : exchanges;
  return (
    <Td wrap className={`min-w-36 ${MID}`}>
      {shown === undefined ? "…" : shown.join(", ") || "none"}
      {more > 1 && !all ? (
        <>
          {" "}
          <TextButton onClick={() => setAll(true)}>and {more} more</TextButton>
        </>
      ) : null}
    </Td>
  );
}

function Repeats({ row, repeats }: { row: ConformerRow; repeats: readonly DroppedFrame[] }) {
  const { show, selected } = useWorkbench();
  const [all, setAll] = useState(false);
  const shown = all ? repeats : repeats.slice(0, FIRST_REPEATS);
  const exchanged = useExchanged(row.frame, shown);
  return (
    <div className="grid gap-3">
      <p>
        {plural(repeats.length, "frame repeats", "frames repeat")} <b className="font-semibold">{row.name}</b>
        . They add to “found”, never to the population.
      </p>
      <Table aria-label={`Frames that repeat ${row.name}`} className="[&_td]:h-8">
        <thead>
          <tr>
            <Th align="right">Frame</Th>
            <Th align="right" unit="Å">
              RMSD
            </Th>
            <Th align="right" unit="kcal/mol" className={MID}>
              Energy above {row.name}
            </Th>
            <Th>As</Th>
            {exchanged ? <Th className={MID}>Atoms exchanged</Th> : null}
            <Th>
              <span className="sr-only">View</span>
            </Th>
          </tr>
        </thead>
        <tbody>
          {shown.map((frame) => (
            <tr key={frame.frame} className="border-b border-rule">
              <Td align="right">{frame.frame}</Td>
              <Td align="right">
                {frame.upperBound ? "to " : ""}
                {formatRmsd(frame.rmsd)}
              </Td>
              <Td align="right" className={MID}>
                {formatEnergy(frame.energyDifference)}
              </Td>
              <Td>{frame.mirror ? "mirror image" : "same hand"}</Td>
              {exchanged ? <ExchangedCell exchanges={exchanged.get(frame.frame)} /> : null}
              <Td align="right">
                <LayOver
                  frame={frame.frame}
                  laid={selected.length === 2 && selected[0] === row.frame && selected[1] === frame.frame}
                  onLay={() => show([row.frame, frame.frame])}
                />
              </Td>
            </tr>
          ))}
        </tbody>
      </Table>
      {repeats.length > FIRST_REPEATS ? (
        <p className="text-xs text-ink-3">
          {shown.length} of {formatCount(repeats.length)} ·{" "}
          <TextButton onClick={() => setAll(!all)}>{all ? "show fewer" : "show all"}</TextButton>
        </p>
      ) : null}
    </div>
  );
}
