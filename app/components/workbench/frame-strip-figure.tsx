import { useMemo } from "react";
import { formatCount, plural } from "~/lib/format";
import { frameStrip, type StripTick } from "~/lib/workbench/frame-strip";

/** Every frame in file order: a tick each, a pin for a remark, a hatched buff block for a held one. */
export function FrameStripFigure({ states }: { states: string }) {
  const { perTick, ticks } = useMemo(() => frameStrip(states), [states]);
  const held = ticks.reduce((sum, tick) => sum + tick.held, 0);
  const waiting = ticks.reduce((sum, tick) => sum + tick.waiting, 0);
  const remarked = ticks.reduce((sum, tick) => sum + tick.remarked, 0);
  return (
    <figure className="mt-6 [print-color-adjust:exact]">
      <figcaption className="mb-2 flex flex-wrap items-baseline justify-between gap-x-4 gap-y-1">
        <h3 className="text-sm font-semibold">
          Every frame, in file order
          {perTick > 1 ? (
            <span className="font-normal text-ink-3"> · one tick stands for {perTick} frames</span>
          ) : null}
        </h3>
        <span aria-hidden="true" className="flex gap-4 text-xs text-ink-3">
          <Legend className="h-3 w-px bg-ink-3">{waiting > 0 ? "waits for an answer" : "accepted"}</Legend>
          {waiting > 0 ? null : <Legend className="h-3 w-[3px] bg-remark-edge">with a remark</Legend>}
          <Legend className="h-3 w-[9px] border-[1.5px] border-held-edge bg-held-ground">held</Legend>
        </span>
      </figcaption>
      <div
        role="img"
        aria-label={`${plural(states.length, "frame")} in file order, ${waiting > 0 ? `${formatCount(waiting)} wait for an answer` : `${formatCount(remarked)} with a remark`}, ${formatCount(held)} held`}
        className="grid grid-cols-[repeat(50,minmax(0,1fr))] gap-y-2 sm:grid-cols-[repeat(100,minmax(0,1fr))]"
      >
        {ticks.map((tick) => (
          <Tick key={tick.first} tick={tick} />
        ))}
      </div>
    </figure>
  );
}

function Legend({ className, children }: { className: string; children: string }) {
  return (
    <span className="inline-flex items-center gap-2">
      <i className={`inline-block ${className}`} />
      {children}
    </span>
  );
}

function Tick({ tick }: { tick: StripTick }) {
  const frames = tick.first === tick.last ? `frame ${tick.first}` : `frames ${tick.first} to ${tick.last}`;
  if (tick.state === "accepted" || tick.state === "waiting") {
    return <i className="mx-auto mt-1 block h-3 w-px bg-ink-3" title={frames} />;
  }
  if (tick.state === "remarked") {
    return (
      <i
        className="relative mx-auto block h-4 w-[2px] bg-remark-edge before:absolute before:-top-px before:-left-[1.5px] before:size-[5px] before:rounded-full before:bg-remark-edge"
        title={`${frames}, with a remark`}
      />
    );
  }
  return (
    <svg
      aria-hidden="true"
      className="mx-auto mt-0.5 block h-[15px] w-full max-w-2 overflow-visible fill-held-ground stroke-held-edge"
      viewBox="0 0 8 15"
      preserveAspectRatio="none"
    >
      <title>{`${frames}, held`}</title>
      <rect x="0.75" y="0.75" width="6.5" height="13.5" strokeWidth="1.5" vectorEffect="non-scaling-stroke" />
      <path d="M2 11 6 4" strokeWidth="1.2" vectorEffect="non-scaling-stroke" />
    </svg>
  );
}
