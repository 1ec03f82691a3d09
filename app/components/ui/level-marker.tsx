import { Fragment } from "react";
import type { LevelView } from "~/lib/views";
import { SelectField } from "./select-field";

const FILLS = [
  "fill-level-1 stroke-level-1",
  "fill-level-2 stroke-level-2",
  "fill-level-3 stroke-level-3",
  "fill-level-4 stroke-level-4",
  "fill-level-5 stroke-level-5",
  "fill-level-6 stroke-level-6",
] as const;

const SHAPES = [
  <circle key="c" cx="6" cy="6" r="4.5" />,
  <rect key="s" x="1.8" y="1.8" width="8.4" height="8.4" />,
  <path key="t" d="M6 .8 11.3 10.4H.7z" />,
  <path key="d" d="M6 .4 11.6 6 6 11.6.4 6z" />,
  <path key="x" d="M4.4.8h3.2v3.6h3.6v3.2H7.6v3.6H4.4V7.6H.8V4.4h3.6z" />,
  <path key="v" d="M6 11.2.7 1.6h10.6z" />,
] as const;

/** Hue and marker of a level by order of arrival, for good; from the seventh on hollow. The name always stands beside it. */
export function LevelMarker({ ordinal, className = "" }: { ordinal: number; className?: string }) {
  const place = (ordinal - 1) % 6;
  const hollow = ordinal > 6;
  return (
    <svg
      viewBox="0 0 12 12"
      aria-hidden="true"
      className={`size-3 shrink-0 overflow-visible ${FILLS[place]} ${hollow ? "fill-none stroke-2" : "stroke-0"} ${className}`}
    >
      {SHAPES[place]}
    </svg>
  );
}

/** The same marker inside a drawing, 12 px wide, its upper left corner at (x, y). */
export function LevelGlyph({ ordinal, x, y }: { ordinal: number; x: number; y: number }) {
  const colour = levelColour(ordinal);
  return (
    <g
      transform={`translate(${x} ${y})`}
      fill={ordinal > 6 ? "none" : colour}
      stroke={ordinal > 6 ? colour : "none"}
      strokeWidth={2}
    >
      {SHAPES[(ordinal - 1) % 6]}
    </g>
  );
}

/** CSS colour of a level's hue, by order of arrival. */
export function levelColour(ordinal: number): string {
  return `var(--color-level-${((ordinal - 1) % 6) + 1})`;
}

/** A name that may go on in the next line behind an underscore or a slash, rather than within a word. */
export function BreakableName({ name }: { name: string }) {
  return name.split(/(?<=[_/])/).map((part, k) => (
    <Fragment key={k}>
      {k > 0 ? <wbr /> : null}
      {part}
    </Fragment>
  ));
}

/** Marker and name of a level. */
export function LevelName({ name, ordinal }: { name: string; ordinal: number }) {
  return (
    <span className="inline-flex items-center gap-2 whitespace-nowrap">
      <LevelMarker ordinal={ordinal} />
      <span>
        <BreakableName name={name} />
      </span>
    </span>
  );
}

/** Choice of a level; its marker stands in the field. */
export function LevelSelect({
  label,
  levels,
  value,
  onChange,
  name,
  help,
  disabled,
  className,
}: {
  label: string;
  levels: readonly LevelView[];
  /** Id of the level. */
  value: string;
  onChange: (id: string) => void;
  name?: string;
  help?: string;
  disabled?: boolean;
  className?: string;
}) {
  const chosen = levels.find((level) => level.id === value);
  return (
    <SelectField
      label={label}
      name={name}
      help={help}
      disabled={disabled}
      className={className}
      value={value}
      onChange={(event) => onChange(event.currentTarget.value)}
      choices={levels.map((level) => ({ value: level.id, label: level.name }))}
      mark={chosen ? <LevelMarker ordinal={chosen.ordinal} /> : null}
    />
  );
}
