import { X } from "lucide-react";
import { Popover } from "radix-ui";
import { type PointerEvent, type ReactNode, useEffect, useRef, useState } from "react";
import { Link } from "react-router";
import { formatRaw, rawValue } from "~/lib/format";
import { IconButton } from "./button";
import { CopyButton } from "./copy-button";
import { linkClass } from "./text-link";

/** Where a number comes from. */
export interface Source {
  name: string;
  /** As printed, with its unit. */
  value: string;
  unit?: string;
  /** With `<sub>` and `<sup>`; the formula of the method. */
  formula?: ReactNode;
  inputs: readonly { label: string; value: ReactNode }[];
  /** Every digit; what Copy puts on the clipboard. */
  raw?: number;
  /** What it was computed with: ids of sift and level, tolerances. */
  recipe?: ReactNode;
  /** Where the method stands: address and words. */
  method?: { to: string; label: string };
}

const HOVER_MS = 300;
/** Kept free around a popover: below, and above, where the rail stays in sight. */
const ROOM = { top: 84, right: 16, bottom: 16, left: 16 } as const;
/** Less than this below the figure, and more above it, sends the popover up; else it scrolls inside of itself. */
const ENOUGH_PX = 240;
/** More than any window: the popover does not change sides by itself, as it would to lie over the rail. */
const NEVER = 100_000;
/** One popover at a time: opening one closes the other. */
let closeOpen: (() => void) | null = null;

/** A printed figure with a dotted underline that tells its origin by hover (300 ms), focus or tap. */
export function Provenance({ children, ...source }: Source & { children: ReactNode }) {
  const [open, setOpen] = useState(false);
  const timer = useRef<ReturnType<typeof setTimeout> | undefined>(undefined);
  const trigger = useRef<HTMLButtonElement>(null);
  const content = useRef<HTMLDivElement>(null);
  // What the popover stands beside: the figure with its label, so that it covers neither.
  const anchor = useRef<{ getBoundingClientRect(): DOMRect }>({
    getBoundingClientRect: () =>
      (trigger.current?.closest("[data-figure]") ?? trigger.current)?.getBoundingClientRect() ??
      new DOMRect(),
  });
  // Focus that comes back on closing must not open it again.
  const returning = useRef(false);
  const byClick = useRef(false);
  const close = useRef(() => setOpen(false));

  const [side, setSide] = useState<"bottom" | "top">("bottom");

  const show = () => {
    const { top, bottom } = anchor.current.getBoundingClientRect();
    const below = window.innerHeight - bottom - ROOM.bottom;
    setSide(below >= ENOUGH_PX || below >= top - ROOM.top ? "bottom" : "top");
    if (closeOpen !== close.current) closeOpen?.();
    closeOpen = close.current;
    setOpen(true);
  };
  const hide = () => {
    clearTimeout(timer.current);
    if (closeOpen === close.current) closeOpen = null;
    setOpen(false);
  };
  useEffect(() => () => clearTimeout(timer.current), []);

  const later = (event: PointerEvent, act: () => void) => {
    if (event.pointerType !== "mouse") return;
    clearTimeout(timer.current);
    timer.current = setTimeout(act, HOVER_MS);
  };
  const leave = (event: PointerEvent) => {
    // What was opened by click or holds the focus stays until Escape or a click elsewhere.
    if (!byClick.current && !content.current?.contains(document.activeElement)) later(event, hide);
    else clearTimeout(timer.current);
  };

  return (
    <Popover.Root
      open={open}
      onOpenChange={(next) => {
        if (next) show();
        else hide();
      }}
    >
      <Popover.Anchor virtualRef={anchor} />
      <Popover.Trigger asChild>
        <button
          ref={trigger}
          type="button"
          aria-label={`${source.name}: ${source.value}${source.unit ? ` ${source.unit}` : ""}. Where this number comes from`}
          className="noscript:no-underline print:no-underline underline decoration-rule-2 decoration-dotted decoration-[1.5px] underline-offset-[5px] hover:decoration-ink-3"
          onPointerEnter={(event) => later(event, show)}
          onPointerLeave={leave}
          onFocus={(event) => {
            if (!returning.current && event.currentTarget.matches(":focus-visible")) show();
            returning.current = false;
          }}
          onBlur={(event) => {
            if (!content.current?.contains(event.relatedTarget)) hide();
          }}
          onClick={(event) => {
            // A popover that focus or hover opened takes the focus on click, so that keys reach what is inside.
            event.preventDefault();
            byClick.current = true;
            show();
            content.current?.focus();
          }}
        >
          {children}
        </button>
      </Popover.Trigger>
      <Popover.Portal>
        <Popover.Content
          ref={content}
          tabIndex={-1}
          sideOffset={8}
          side={side}
          collisionPadding={{ ...ROOM, [side === "bottom" ? "top" : "bottom"]: NEVER }}
          align="start"
          aria-label={`Where this number comes from: ${source.name}`}
          className="figures z-40 max-h-(--radix-popover-content-available-height) w-96 max-w-[calc(100vw-2rem)] overflow-y-auto rounded-md border border-rule-2 bg-sheet p-4 text-sm text-ink shadow-float"
          onPointerEnter={() => clearTimeout(timer.current)}
          onPointerLeave={leave}
          onOpenAutoFocus={(event) => {
            event.preventDefault();
            if (byClick.current) content.current?.focus();
          }}
          onCloseAutoFocus={(event) => {
            event.preventDefault();
            const inside = content.current?.contains(document.activeElement);
            if (byClick.current || inside) {
              returning.current = true;
              trigger.current?.focus();
            }
            byClick.current = false;
          }}
          onInteractOutside={(event) => {
            if (trigger.current?.contains(event.target as Node)) event.preventDefault();
          }}
        >
          <SourceFacts {...source} />
        </Popover.Content>
      </Popover.Portal>
    </Popover.Root>
  );
}

function SourceFacts({ name, value, unit, formula, inputs, raw, recipe, method }: Source) {
  return (
    <>
      <div className="flex items-center justify-between gap-4">
        <p className="font-semibold">{name}</p>
        <Popover.Close asChild>
          <IconButton label="Close">
            <X aria-hidden="true" />
          </IconButton>
        </Popover.Close>
      </div>
      <p className="mt-1 text-xl font-medium tracking-title">
        {value} {unit ? <span className="text-xs font-normal text-ink-3">{unit}</span> : null}
      </p>
      {formula ? <p className="my-2 rounded-sm bg-sunk px-3 py-2">{formula}</p> : null}
      <dl className="mt-2 grid grid-cols-[auto_1fr] gap-x-4 gap-y-1 [&_dt]:text-ink-3">
        {inputs.map((input) => (
          <FactRow key={input.label} label={input.label} value={input.value} />
        ))}
        {raw === undefined ? null : <FactRow label="raw value" value={formatRaw(raw)} />}
        {recipe ? <FactRow label="recipe" value={recipe} /> : null}
      </dl>
      <div className="mt-4 flex flex-wrap items-center gap-4">
        {raw === undefined ? null : <CopyButton text={rawValue(raw)}>Copy value</CopyButton>}
        {method ? (
          <Link to={method.to} className={linkClass}>
            {method.label}
          </Link>
        ) : null}
      </div>
    </>
  );
}

function FactRow({ label, value }: { label: string; value: ReactNode }) {
  return (
    <>
      <dt>{label}</dt>
      <dd className="min-w-0 break-words">{value}</dd>
    </>
  );
}
