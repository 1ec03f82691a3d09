import { useState } from "react";
import { Button } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import { SelectField } from "~/components/ui/select-field";
import { TextButton } from "~/components/ui/text-link";
import { fixed, plural, readTyped } from "~/lib/format";
import { hoursEach, RULES } from "~/lib/plan/hours";
import { type HoursSource, hoursSchema } from "~/lib/plan/plan";
import { formatHours } from "~/lib/plan/words";

const WORDS: Record<HoursSource["from"], string> = {
  typed: "Typed in",
  timings: "Timings of this molecule",
  scaled: "Timings of other sizes",
  rule: "Rule of thumb",
  known: "Energies known: nothing to compute",
  unknown: "Not known",
};

/** What needs no further word. */
const BARE = ["known", "unknown"] as const;
const isBare = (from: HoursSource["from"]): from is (typeof BARE)[number] => BARE.some((one) => one === from);

/** Where the core hours of one structure come from: own timings, other sizes, a rule of thumb, or typed in. */
export function HoursDialog({
  name,
  source,
  known,
  atoms,
  readOnly,
  onChange,
}: {
  name: string;
  source: HoursSource;
  /** The level has energies: they may cost nothing. */
  known: boolean;
  atoms: number;
  readOnly: boolean;
  onChange: (source: HoursSource) => void;
}) {
  const [open, setOpen] = useState(false);
  const text = source.from === "unknown" ? "not known" : formatHours(hoursEach(source, atoms).hours);
  if (readOnly) return text;
  return (
    <Dialog
      open={open}
      onOpenChange={setOpen}
      trigger={
        <TextButton printed aria-label={`${text} core hours each at ${name}. Change`}>
          {text}
        </TextButton>
      }
      title={`Core hours for one structure at ${name}`}
      description={`Of ${plural(atoms, "atom")}. Core hours are hours times cores.`}
    >
      <HoursForm
        source={source}
        known={known}
        atoms={atoms}
        onDone={(next) => {
          onChange(next);
          setOpen(false);
        }}
      />
    </Dialog>
  );
}

function HoursForm({
  source,
  known,
  atoms,
  onDone,
}: {
  source: HoursSource;
  known: boolean;
  atoms: number;
  onDone: (source: HoursSource) => void;
}) {
  const [from, setFrom] = useState(source.from);
  const [rule, setRule] = useState(source.from === "rule" ? source.rule : "dft-optimise");
  const [text, setText] = useState(textOf(source));
  const [exponent, setExponent] = useState(source.from === "scaled" ? String(source.exponent) : "3");
  const [error, setError] = useState<string | null>(null);
  const made = read(from, rule, text, exponent);
  return (
    <form
      className="grid gap-4"
      onSubmit={(event) => {
        event.preventDefault();
        if (made) onDone(made);
        else setError(HELP[from]);
      }}
    >
      <SelectField
        label="From"
        value={from}
        onChange={(event) => {
          setFrom(event.currentTarget.value as HoursSource["from"]);
          setError(null);
        }}
        choices={Object.entries(WORDS)
          .filter(([value]) => known || value !== "known")
          .map(([value, label]) => ({ value, label }))}
      />
      {from === "rule" ? (
        <SelectField
          label="Rule of thumb"
          help="Common practice, no source: programs and machines differ by more than ten times."
          value={rule}
          onChange={(event) => setRule(event.currentTarget.value)}
          choices={RULES.map((one) => ({
            value: one.id,
            label: `${one.label}: ${formatHours(one.hours)} at ${one.atoms} atoms, power ${one.exponent}`,
          }))}
        />
      ) : isBare(from) ? null : (
        <TextField
          label={LABELS[from]}
          value={text}
          onChange={(event) => setText(event.currentTarget.value)}
          help={error ? undefined : HELP[from]}
          error={error ?? undefined}
          autoComplete="off"
        />
      )}
      {from === "scaled" ? (
        <TextField
          label="Power of the size, for timings of one size"
          value={exponent}
          onChange={(event) => setExponent(event.currentTarget.value)}
          help="With two sizes the power is fitted and this one is not used."
          autoComplete="off"
        />
      ) : null}
      <DialogFoot note={made ? madeWords(made, atoms) : undefined}>
        <Button type="submit" kind="primary">
          Set the hours
        </Button>
      </DialogFoot>
    </form>
  );
}

const LABELS = {
  typed: "Core hours",
  timings: "Core hours of finished structures",
  scaled: "Atoms: core hours",
} as const;

const HELP: Record<HoursSource["from"], string> = {
  typed: "A number above 0, for example 3.4.",
  timings: "Numbers above 0 with spaces between them, for example 3.2 3.6 3.4; their mean counts.",
  scaled: "Pairs with spaces between them, for example 20:1.1 32:4.6.",
  rule: "Choose one.",
  known: "",
  unknown: "",
};

function textOf(source: HoursSource): string {
  if (source.from === "typed") return String(source.hours);
  if (source.from === "timings") return source.hours.join(" ");
  return source.from === "scaled" ? source.timings.map((t) => `${t.atoms}:${t.hours}`).join(" ") : "";
}

function read(from: HoursSource["from"], rule: string, text: string, exponent: string): HoursSource | null {
  const words = text.trim().split(/[\s;]+/);
  const made = {
    typed: { from: "typed", hours: readTyped(text) },
    timings: { from: "timings", hours: words.map((text) => readTyped(text)) },
    scaled: {
      from: "scaled",
      timings: words.map((pair) => {
        const [size, hours] = pair.split(":");
        return { atoms: readTyped(size ?? ""), hours: readTyped(hours ?? "") };
      }),
      exponent: readTyped(exponent),
    },
    rule: { from: "rule", rule },
    known: { from },
    unknown: { from },
  }[from];
  const parsed = hoursSchema.safeParse(made);
  return parsed.success ? parsed.data : null;
}

function madeWords(source: HoursSource, atoms: number): string {
  if (source.from === "known") return "0 core hours: the energies are there.";
  if (source.from === "unknown") return "The cost leaves this step out until the hours are set.";
  const { hours, exponent, fitted } = hoursEach(source, atoms);
  const power = exponent === null ? "" : `, power ${fixed(exponent, 2)}${fitted ? " fitted" : ""}`;
  return `${formatHours(hours)} core hours for ${plural(atoms, "atom")}${power}.`;
}
