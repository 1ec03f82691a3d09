import { href } from "react-router";
import { Finding, SectionHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { TextLink } from "~/components/ui/text-link";
import { RemovedList } from "~/components/workbench/removed-list";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { type ColumnsView, looksLikeLevel } from "~/lib/columns-view";
import { plural } from "~/lib/format";
import { AddColumns } from "./add-columns";
import { ColumnTable } from "./column-table";
import { DeriveForm } from "./derive-form";

/** Every quantity over the frames: levels and properties, where they come from, and the way to more. */
export function ColumnsSection({ view }: { view: ColumnsView }) {
  const { ensemble } = useWorkbench();
  const { columns, removed } = view;
  const levels = columns.filter(({ kind }) => kind === "energy").length;
  const properties = columns.length - levels;
  const maybe = columns.filter((column) => looksLikeLevel(column) && !column.counter);
  const unstated = columns.filter(({ kind, kindStated }) => kind === "energy" && !kindStated);
  return (
    <section aria-labelledby="section-title">
      <SectionHead
        id="section-title"
        title="Columns"
        aside={<TextLink to="/formats#tables">What tables are accepted</TextLink>}
      />
      <Finding
        more={
          unstated.length > 0
            ? `${unstated.map(({ name }) => name).join(", ")}: taken as electronic until somebody says what ${unstated.length === 1 ? "it is" : "they are"}.`
            : undefined
        }
      >
        {columns.length === 0
          ? "The frames have neither energies nor properties yet."
          : `The frames have ${plural(levels, "level")} and ${plural(properties, "property", "properties")}.`}
      </Finding>
      {ensemble.mayCompute && maybe.length > 0 ? (
        <Note className="mt-4">
          {`${maybe.map(({ name }) => name).join(", ")}: ${maybe.length === 1 ? "a property that looks like energies" : "properties that look like energies"}. “Use as a level” makes ${maybe.length === 1 ? "it a level" : "them levels"} to compare and weigh with, once you say the unit.`}
        </Note>
      ) : null}
      {columns.length > 0 ? (
        <ColumnTable columns={columns} ensembleId={ensemble.id} mayChange={ensemble.mayCompute} />
      ) : null}
      {ensemble.mayCompute ? (
        <>
          <AddColumns ensembleId={ensemble.id} />
          {columns.length > 0 ? <DeriveForm ensembleId={ensemble.id} columns={columns} /> : null}
          <RemovedList
            removed={removed}
            action={href("/ensembles/:id/columns", { id: ensemble.id })}
            field="column"
          />
          <p className="mt-6 hidden text-ink-3 noscript:block">
            Adding a file needs script here; the API takes the same files without.
          </p>
        </>
      ) : (
        <Note className="mt-9">An analyst or an owner of the team adds levels and tables.</Note>
      )}
    </section>
  );
}
