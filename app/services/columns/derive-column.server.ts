import { eq } from "drizzle-orm";
import { z } from "zod";
import { db, inTransaction, type Queryable } from "../../db/client.server.ts";
import { columns } from "../../db/schema.server.ts";
import { ENERGY_KINDS } from "../../lib/api/schemas.ts";
import { initialRule } from "../../lib/averages/rule.ts";
import { unpackColumn } from "../../lib/column-data.ts";
import { DomainError } from "../../lib/errors.ts";
import { formatCount, plural } from "../../lib/format.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { frameStrip } from "../ensembles/accepted-frames.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { type Formula, readFormula } from "./expression.ts";
import { derivedColumns, recomputeDerived, toInput } from "./recompute-derived.server.ts";
import { lockEnsemble, storeColumn, touchEnsemble } from "./store-column.server.ts";

export const deriveSchema = z.strictObject({
  name: z.string().trim().min(1, "Give the column a name.").max(120),
  expression: z.string().trim().min(1, "Write a formula.").max(500),
  energyKind: z.enum(ENERGY_KINDS).optional(),
  temperature: z.number().min(0.001).max(100_000).nullable().optional(),
  solvent: z.string().trim().max(120).optional(),
  replace: z.boolean().optional(),
});
export type DeriveRequest = z.infer<typeof deriveSchema>;

/** What a formula would give, for the page while somebody writes it. */
export interface FormulaCheck {
  kind: "energy" | "property";
  unit: string | null;
  energyKind: (typeof ENERGY_KINDS)[number];
  temperature: number | null;
  /** Accepted frames with a value, and their number. */
  count: number;
  accepted: number;
  /** Values of the first frames that have one. */
  first: { frame: number; value: number }[];
  inputs: string[];
  remarks: string[];
}

const facts = {
  id: columns.id,
  name: columns.name,
  kind: columns.kind,
  unit: columns.unit,
  energyKind: columns.energyKind,
  temperature: columns.temperature,
};

async function formulaFor(on: Queryable, ensembleId: string, expression: string): Promise<Formula> {
  const rows = await on.select(facts).from(columns).where(eq(columns.ensembleId, ensembleId));
  return readFormula(expression, rows.map(toInput));
}

async function inputsOf(on: Queryable, ensembleId: string, formula: Formula, frames: number) {
  const needed = new Set(formula.inputs.map(({ column }) => column));
  const rows = await on
    .select({ id: columns.id, data: columns.data })
    .from(columns)
    .where(eq(columns.ensembleId, ensembleId));
  return new Map(
    rows.filter(({ id }) => needed.has(id)).map((row) => [row.id, unpackColumn(row.data, frames)]),
  );
}

/** Why a formula gives no frame a value: its columns never stand together, or what it divides by is 0. */
function nothingWords({ having, byZero }: ReturnType<Formula["inputsIn"]>): string {
  if (having === 0) return "No frame has a value: none has all columns that the formula needs.";
  const all = `No frame has a value: ${plural(having, "frame has", "frames have")} all columns that the formula needs`;
  return byZero > 0
    ? `${all}, and in ${byZero === having ? "each" : formatCount(byZero)} of them it divides by zero.`
    : `${all}, and in each of them the result is out of the range of numbers.`;
}

/** Reads a formula and says what it would give; nothing is kept. */
export async function checkFormula(options: {
  actor: Actor;
  ensembleId: string;
  expression: string;
}): Promise<FormulaCheck> {
  const { ensembleId } = await accessEnsemble(options.actor, "read", options.ensembleId);
  const strip = await frameStrip(ensembleId);
  const formula = await formulaFor(db, ensembleId, options.expression);
  const inputs = await inputsOf(db, ensembleId, formula, strip.length);
  const { values, present } = formula.compute(inputs, strip.length);
  const having = [...strip].flatMap((mark, k) => (mark !== "h" && present[k] === 1 ? [k] : []));
  const { kind, unit, energyKind, temperature, remarks } = formula;
  return {
    ...{ kind, unit, energyKind, temperature, remarks },
    count: having.length,
    accepted: [...strip].filter((mark) => mark !== "h").length,
    first: having.slice(0, 3).map((k) => ({ frame: k + 1, value: values[k] ?? 0 })),
    inputs: formula.inputs.map(({ name }) => name),
  };
}

/** A formula must not need itself, not even round a corner. */
async function refuseCircle(on: Queryable, ensembleId: string, id: string, formula: Formula): Promise<void> {
  const derived = await derivedColumns(on, ensembleId);
  const reached = new Set<string>();
  const walk = (column: string): void => {
    if (reached.has(column)) return;
    reached.add(column);
    for (const next of derived.find((one) => one.id === column)?.inputs ?? []) walk(next);
  };
  for (const { column } of formula.inputs) walk(column);
  if (!reached.has(id)) return;
  const message = "The formula would need its own result.";
  throw new DomainError("invalid", "The formula is not right", message, {
    faults: [{ field: "expression", message }],
  });
}

/**
 * Keeps a column that is computed from others: `E_high + (G_low - E_low)`. It remembers its formula and is computed again
 * whenever one of its inputs changes.
 *
 * @returns the id of the column
 * @throws DomainError invalid for a formula that does not read or whose units do not fit, conflict for a name that is taken
 */
export async function deriveColumn(options: {
  actor: Actor;
  ensembleId: string;
  request: DeriveRequest;
}): Promise<string> {
  const { request } = options;
  const at = await accessEnsemble(options.actor, "compute", options.ensembleId);
  return inTransaction(async (tx) => {
    const { frames } = await lockEnsemble(tx, at);
    const formula = await formulaFor(tx, at.ensembleId, request.expression);
    const rows = await tx.select(facts).from(columns).where(eq(columns.ensembleId, at.ensembleId));
    const same = rows.find(({ name }) => name === request.name);
    if (same !== undefined && request.replace === true)
      await refuseCircle(tx, at.ensembleId, same.id, formula);
    const inputs = await inputsOf(tx, at.ensembleId, formula, frames);
    const data = formula.compute(inputs, frames);
    const count = data.present.reduce((sum, flag) => sum + flag, 0);
    if (count === 0) {
      const message = nothingWords(formula.inputsIn(inputs, frames));
      throw new DomainError("invalid", "The formula gives nothing", message, {
        faults: [{ field: "expression", message }],
      });
    }
    const stored = await storeColumn(
      tx,
      at,
      {
        name: request.name,
        kind: formula.kind,
        unit: formula.unit,
        rule: initialRule(formula.unit),
        data,
        origin: "expression",
        energyKind: request.energyKind ?? formula.energyKind,
        temperature: request.temperature === undefined ? formula.temperature : request.temperature,
        kindStated: request.energyKind !== undefined,
        solvent: request.solvent ? request.solvent : null,
        definition: { type: "expression", text: formula.text, inputs: formula.inputs },
      },
      { replace: request.replace },
    );
    if (stored.replaced) await recomputeDerived(tx, at.ensembleId);
    await touchEnsemble(tx, at.ensembleId);
    await writeEntry(tx, at, at, {
      type: "columns-added",
      data: {
        from: `the formula ${formula.text}`,
        sha256: null,
        columns: [
          {
            id: stored.id,
            name: request.name,
            kind: formula.kind,
            unit: formula.unit,
            count,
            replaced: stored.replaced,
          },
        ],
        matched: `computed for ${plural(count, "frame")}`,
        answers: {},
      },
    });
    return stored.id;
  });
}
