import { data } from "react-router";
import { ColumnsSection } from "~/components/columns/columns-section";
import type { ActAnswer } from "~/components/workbench/act-answer";
import { sectionMeta } from "~/components/workbench/section-meta";
import { actorContext, requestIdContext } from "~/context";
import { DomainError } from "~/lib/errors";
import { readTyped } from "~/lib/format";
import { readForm } from "~/routes/read-form.server";
import type { Actor } from "~/services/auth/access.server";
import { changeColumn, columnChangeSchema } from "~/services/columns/change-column.server";
import { checkFormula, deriveColumn, deriveSchema } from "~/services/columns/derive-column.server";
import { loadColumns } from "~/services/columns/load-columns.server";
import { columnSpan, levelStatedSchema, makeLevel, makeProperty } from "~/services/columns/make-level.server";
import { removeColumn, restoreColumn } from "~/services/columns/remove-column.server";
import { forPage, notFound, refuseForm } from "~/services/http.server";
import type { Route } from "./+types/columns";

export function meta({ matches }: Route.MetaArgs) {
  return sectionMeta("Columns", matches);
}

export async function loader({ params, context }: Route.LoaderArgs) {
  const view = await forPage(context.get(requestIdContext), () =>
    loadColumns({ actor: context.get(actorContext), ensembleId: params.id }),
  );
  return { view };
}

/** One act a form: `intent` says which. */
export async function action({ request, params, context }: Route.ActionArgs) {
  const actor = context.get(actorContext);
  return forPage(context.get(requestIdContext), async () => {
    const form = await readForm(request);
    try {
      return await act(actor, params.id, form);
    } catch (error) {
      return refuseForm(error, {});
    }
  });
}

const refused = (message: string) => data({ ok: false, message } satisfies ActAnswer, { status: 400 });

async function act(actor: Actor, ensembleId: string, form: FormData) {
  const text = (name: string) => String(form.get(name) ?? "").trim();
  const intent = text("intent");
  const at = { actor, ensembleId, columnId: text("column") };
  switch (intent) {
    case "remove":
      await removeColumn(at);
      return { ok: true, done: { intent } } satisfies ActAnswer;
    case "remove-added": {
      const ids = form.getAll("column").map(String);
      if (ids.length === 0) throw notFound();
      for (const columnId of ids) await removeColumn({ actor, ensembleId, columnId });
      return { ok: true, done: { intent } } satisfies ActAnswer;
    }
    case "restore":
      await restoreColumn(at);
      return { ok: true, done: { intent } } satisfies ActAnswer;
    case "change": {
      const kelvin = text("temperature");
      const has = (name: string) => (form.has(name) ? { [name]: text(name) } : {});
      const change = columnChangeSchema.safeParse({
        ...has("name"),
        ...has("energyKind"),
        ...has("geometryLevel"),
        ...has("solvent"),
        ...(form.has("temperature")
          ? { temperature: kelvin === "" ? null : (readTyped(kelvin, "K") ?? Number.NaN) }
          : {}),
      });
      if (!change.success) return refused(change.error.issues[0]?.message ?? "Look at the fields again.");
      await changeColumn({ ...at, change: change.data });
      return { ok: true, done: { intent } } satisfies ActAnswer;
    }
    case "span":
      return { ok: true, span: await columnSpan(at) };
    case "use-as-level": {
      const kelvin = text("temperature");
      const stated = levelStatedSchema.safeParse({
        name: text("name"),
        unit: text("unit"),
        energyKind: text("energyKind"),
        temperature: kelvin === "" ? null : (readTyped(kelvin, "K") ?? Number.NaN),
        geometryLevel: text("geometryLevel"),
        solvent: text("solvent"),
      });
      if (!stated.success) return refused(stated.error.issues[0]?.message ?? "Look at the fields again.");
      await makeLevel({ ...at, stated: stated.data });
      return { ok: true, done: { intent } } satisfies ActAnswer;
    }
    case "use-as-property":
      await makeProperty(at);
      return { ok: true, done: { intent } } satisfies ActAnswer;
    case "check": {
      const expression = text("expression");
      try {
        const formula = await checkFormula({ actor, ensembleId, expression });
        return { ok: true, expression, formula };
      } catch (error) {
        // Half a formula is no failure while somebody writes it.
        if (!(error instanceof DomainError) || error.code !== "invalid") throw error;
        return { ok: false, expression, message: error.message };
      }
    }
    case "derive": {
      const request = deriveSchema.safeParse({
        name: text("name"),
        expression: text("expression"),
        ...(text("energyKind") === "" ? {} : { energyKind: text("energyKind") }),
      });
      if (!request.success) return refused(request.error.issues[0]?.message ?? "Look at the fields again.");
      await deriveColumn({ actor, ensembleId, request: request.data });
      return { ok: true, done: { intent } } satisfies ActAnswer;
    }
    default:
      throw notFound();
  }
}

export default function Columns({ loaderData }: Route.ComponentProps) {
  return <ColumnsSection view={loaderData.view} />;
}
