import { useEffect, useState } from "react";
import { href, useFetcher } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import { SelectField } from "~/components/ui/select-field";
import { TextButton } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import type { ActAnswer } from "~/components/workbench/act-answer";
import { type ColumnView, ENERGY_KIND_WORDS, proposedEnergyUnit } from "~/lib/columns-view";
import { formatEnergy, plural } from "~/lib/format";
import { ENERGY_UNITS, type EnergyUnit, kcalPer } from "~/lib/units";

interface Span {
  lowest: number | null;
  highest: number | null;
  count: number;
}

/** Outside of these a unit is probably the wrong one. */
const LEAST_SPREAD_KCAL = 0.02;
const MOST_SPREAD_KCAL = 100;

function spreadWords(span: Span, unit: EnergyUnit): string {
  if (span.lowest === null || span.highest === null) return "";
  const kcal = (span.highest - span.lowest) * kcalPer(unit);
  const odd =
    kcal < LEAST_SPREAD_KCAL
      ? ": little for conformers"
      : kcal > MOST_SPREAD_KCAL
        ? ": much for conformers"
        : "";
  return `, a spread of ${kcal < 0.005 ? "under 0.01" : formatEnergy(kcal)} kcal/mol${odd}`;
}

/** A property whose numbers are energies becomes a level: the numbers stay, unit and kind are stated here. */
export function UseAsLevel({ column, ensembleId }: { column: ColumnView; ensembleId: string }) {
  const [open, setOpen] = useState(false);
  const proposed = proposedEnergyUnit(column);
  const [unit, setUnit] = useState<string>(proposed ?? "");
  const [kind, setKind] = useState("electronic");
  const save = useFetcher<ActAnswer>();
  const look = useFetcher<{ span?: Span }>();
  const action = href("/ensembles/:id/columns", { id: ensembleId });
  // At once: when the page has its columns again, this one is a level and the dialog is gone.
  const done = save.data?.ok === true;
  useEffect(() => {
    if (!done) return;
    setOpen(false);
    showToast({ tone: "done", text: `${column.name} is a level now; the logbook says so.` });
  }, [done, column.name]);
  const show = (next: boolean) => {
    setOpen(next);
    if (next && look.data === undefined) {
      look.submit({ intent: "span", column: column.id }, { method: "post", action });
    }
  };
  const span = look.data?.span;
  const choices = ENERGY_UNITS.map((value) => ({
    value,
    label: `${value}${span ? spreadWords(span, value) : ""}`,
  }));
  return (
    <Dialog
      open={open}
      onOpenChange={show}
      trigger={<TextButton aria-label={`Use ${column.name} as a level`}>Use as a level</TextButton>}
      title={`Use ${column.name} as a level`}
      description={
        <p>
          Its numbers stay as they are
          {span ? `, ${plural(span.count, "accepted frame")} with a value` : ""}. What they mean cannot be
          read off them: state it here.
        </p>
      }
    >
      <save.Form method="post" action={action} className="grid gap-4">
        <input type="hidden" name="intent" value="use-as-level" />
        <input type="hidden" name="column" value={column.id} />
        <SelectField
          label="Unit of the numbers"
          name="unit"
          required
          value={unit}
          onChange={(event) => setUnit(event.currentTarget.value)}
          choices={[{ value: "", label: "Choose the unit", disabled: true }, ...choices]}
          help={proposed ? `${proposed} is what ${column.unit ? "its unit" : "its name"} says.` : undefined}
        />
        <TextField
          label="Name of the level of theory"
          name="name"
          defaultValue={column.name}
          maxLength={120}
          required
          autoComplete="off"
          spellCheck={false}
          error={save.data && !save.data.ok && save.state === "idle" ? save.data.message : undefined}
        />
        <SelectField
          label="Kind of energy"
          name="energyKind"
          value={kind}
          onChange={(event) => setKind(event.currentTarget.value)}
          choices={Object.entries(ENERGY_KIND_WORDS).map(([value, label]) => ({ value, label }))}
          help="Electronic energies are weighted by copies, free energies by the mirror factor."
        />
        {kind === "free" || kind === "enthalpy" ? (
          <TextField label="Temperature" name="temperature" unit="K" inputMode="decimal" />
        ) : null}
        <TextField label="Level of the geometry, if another" name="geometryLevel" maxLength={120} />
        <TextField label="Solvent" name="solvent" maxLength={120} defaultValue={column.solvent ?? ""} />
        <DialogFoot note="It can be made a property again; both stand in the logbook.">
          <SubmitButton pending={save.state !== "idle"} disabled={unit === ""}>
            Use as a level
          </SubmitButton>
          <Button onClick={() => setOpen(false)}>Leave it a property</Button>
        </DialogFoot>
      </save.Form>
    </Dialog>
  );
}

/** The way back: a level becomes a property, its numbers and unit stay. */
export function UseAsProperty({
  column,
  ensembleId,
  onDone,
}: {
  column: ColumnView;
  ensembleId: string;
  onDone: () => void;
}) {
  const back = useFetcher<ActAnswer>();
  // At once, as above.
  const done = back.data?.ok === true;
  useEffect(() => {
    if (!done) return;
    onDone();
    showToast({ tone: "done", text: `${column.name} is a property now; the logbook says so.` });
  }, [done, onDone, column.name]);
  const refused = back.data && !back.data.ok && back.state === "idle" ? back.data.message : undefined;
  return (
    <div className="border-t border-rule pt-4">
      <Button
        disabled={column.usedBy.length > 0 || back.state !== "idle"}
        onClick={() =>
          back.submit(
            { intent: "use-as-property", column: column.id },
            { method: "post", action: href("/ensembles/:id/columns", { id: ensembleId }) },
          )
        }
      >
        Make it a property
      </Button>
      <p className="mt-2 text-xs text-ink-3">
        It is then averaged instead of weighed with. Sifts at this level stay as they were computed.
      </p>
      {refused ? (
        <p role="alert" className="mt-2 text-xs text-danger">
          {refused}
        </p>
      ) : null}
    </div>
  );
}
