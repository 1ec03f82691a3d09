import { useEffect, useState } from "react";
import { href, useFetcher } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { BlockHead } from "~/components/ui/finding";
import type { ActAnswer } from "~/components/workbench/act-answer";
import { useDebounced } from "~/hooks/use-debounced";
import { type ColumnView, ENERGY_KIND_WORDS } from "~/lib/columns-view";
import { formatRaw, plural } from "~/lib/format";
import type { FormulaCheck } from "~/services/columns/derive-column.server";

interface CheckAnswer {
  ok?: boolean;
  message?: string;
  expression?: string;
  formula?: FormulaCheck;
}

/** A name as a formula takes it: in quotes unless it is plain letters. */
function quoted(name: string): string {
  return /^[A-Za-z][A-Za-z0-9_]*$/.test(name) ? name : `"${name}"`;
}

/** A column computed from others, with its units checked while it is written. */
export function DeriveForm({ ensembleId, columns }: { ensembleId: string; columns: readonly ColumnView[] }) {
  const save = useFetcher<ActAnswer>();
  const check = useFetcher<CheckAnswer>();
  const [expression, setExpression] = useState("");
  const [name, setName] = useState("");
  const action = href("/ensembles/:id/columns", { id: ensembleId });
  const later = useDebounced((text: string) => {
    check.submit({ intent: "check", expression: text }, { method: "post", action });
  }, 300);
  const write = (text: string) => {
    setExpression(text);
    if (text.trim() !== "") later(text);
  };
  const done = save.data?.ok === true && save.state === "idle";
  useEffect(() => {
    if (!done) return;
    setExpression("");
    setName("");
  }, [done]);
  const said = expression.trim() === "" ? undefined : check.data;
  const formula = said?.ok ? said.formula : undefined;
  const first = columns[0]?.name ?? "E_low";
  return (
    <section className="mt-9" aria-labelledby="derive-column">
      <BlockHead id="derive-column" title="Compute a column from others" />
      <save.Form method="post" action={action} className="grid max-w-[46rem] gap-4">
        <input type="hidden" name="intent" value="derive" />
        <TextField
          label="Formula"
          name="expression"
          value={expression}
          required
          maxLength={500}
          autoComplete="off"
          spellCheck={false}
          onChange={(event) => write(event.currentTarget.value)}
          error={said && !said.ok && check.state === "idle" ? said.message : undefined}
          help={`Names, numbers, + − * / and brackets, such as ${quoted(first)} + (G_low - E_low). Names with other signs stand in quotes.`}
        />
        <p role="status" className="figures text-ink-2">
          {formula ? checkWords(formula) : ""}
        </p>
        <TextField
          label="Name of the new column"
          name="name"
          value={name}
          required
          maxLength={120}
          autoComplete="off"
          onChange={(event) => setName(event.currentTarget.value)}
          error={save.data && !save.data.ok ? save.data.message : undefined}
        />
        <div>
          <SubmitButton kind="plain" pending={save.state !== "idle"}>
            Add the computed column
          </SubmitButton>
        </div>
      </save.Form>
    </section>
  );
}

function checkWords({
  kind,
  unit,
  energyKind,
  temperature,
  count,
  accepted,
  first,
  remarks,
}: FormulaCheck): string {
  const at = temperature === null ? "" : ` at ${temperature} K`;
  const what = kind === "energy" ? `A level, ${ENERGY_KIND_WORDS[energyKind]}${at}` : "A property";
  const where = unit === null ? "a plain number" : `in ${unit}`;
  const [one] = first;
  const example = one ? ` Frame ${one.frame}: ${formatRaw(one.value)}.` : "";
  const said = remarks.length > 0 ? ` ${remarks.join(" ")}` : "";
  return `${what}, ${where}, for ${count} of ${plural(accepted, "accepted frame")}.${example}${said}`;
}
