import { useCallback, useEffect, useState } from "react";
import { href, useFetcher } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import { LevelMarker } from "~/components/ui/level-marker";
import { SelectField } from "~/components/ui/select-field";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import type { ActAnswer } from "~/components/workbench/act-answer";
import { type ColumnView, ENERGY_KIND_WORDS, groupColumns, whyNoLevel } from "~/lib/columns-view";
import { formatCount, formatTemperature, plural } from "~/lib/format";
import { ScrollBox } from "./scroll-box";
import { UseAsLevel, UseAsProperty } from "./use-as-level";

interface Props {
  ensembleId: string;
  mayChange: boolean;
}

/** What a column holds, in the words of its kind. */
function kindWords(column: ColumnView): string {
  if (column.kind === "property") {
    const atom = column.atom === null ? "" : `, atom ${column.atom}`;
    return `property, ${column.rule ?? "linear"}${atom}`;
  }
  const at = column.temperature === null ? "" : ` at ${formatTemperature(column.temperature)} K`;
  const stated = column.kindStated ? "" : ", not stated";
  return `${ENERGY_KIND_WORDS[column.energyKind ?? "electronic"]}${at}${stated}`;
}

export function ColumnTable({ columns, ensembleId, mayChange }: Props & { columns: readonly ColumnView[] }) {
  return (
    <ScrollBox label="Columns" className="mt-5">
      <Table aria-label="Columns of the ensemble">
        <thead>
          <tr>
            <Th>Column</Th>
            <Th>Unit</Th>
            <Th>Kind</Th>
            <Th align="right">Frames</Th>
            <Th align="right">Missing</Th>
            <Th>From</Th>
            {mayChange ? <Th className="print:hidden">Change</Th> : null}
          </tr>
        </thead>
        <tbody>
          {groupColumns(columns).map((group) =>
            group.length === 1 && group[0] ? (
              <ColumnRow key={group[0].id} column={group[0]} {...{ ensembleId, mayChange }} />
            ) : (
              <GroupRows key={group[0]?.id} group={group} {...{ ensembleId, mayChange }} />
            ),
          )}
        </tbody>
      </Table>
    </ScrollBox>
  );
}

/** A quantity of many atoms: one row that opens to one an atom. */
function GroupRows({ group, ensembleId, mayChange }: Props & { group: readonly ColumnView[] }) {
  const [open, setOpen] = useState(false);
  const [first] = group;
  if (!first) return null;
  const counts = group.map(({ count }) => count);
  const missing = group.map(({ missing: none }) => none);
  const range = (values: readonly number[]) => {
    const [low, high] = [Math.min(...values), Math.max(...values)];
    return low === high ? formatCount(low) : `${formatCount(low)} to ${formatCount(high)}`;
  };
  return (
    <>
      <Tr>
        <Td tall wrap className="min-w-32 font-medium break-words">
          {first.quantity}
          <span className="block text-xs font-normal text-ink-3">{plural(group.length, "column")}</span>
        </Td>
        <Td>{first.unit ?? ""}</Td>
        <Td wrap className="min-w-36">
          property, {first.rule ?? "linear"}, {plural(group.length, "atom")}
        </Td>
        <Td align="right" className="figures">
          {range(counts)}
        </Td>
        <Td align="right" className="figures">
          {range(missing)}
        </Td>
        <Td wrap className="min-w-40 break-words text-ink-2">
          {first.origin}
        </Td>
        {mayChange ? (
          <Td className="print:hidden">
            <TextButton
              aria-expanded={open}
              aria-label={`${open ? "Fold" : "Show"} the atoms of ${first.quantity}`}
              onClick={() => setOpen(!open)}
            >
              {open ? "Fold" : "Show atoms"}
            </TextButton>
          </Td>
        ) : null}
      </Tr>
      {open
        ? group.map((column) => <ColumnRow key={column.id} column={column} {...{ ensembleId, mayChange }} />)
        : null}
    </>
  );
}

function ColumnRow({ column, ensembleId, mayChange }: Props & { column: ColumnView }) {
  return (
    <Tr>
      <Td tall wrap className="min-w-32">
        <span className="flex items-center gap-2 font-medium break-words">
          {column.kind === "energy" ? <LevelMarker ordinal={column.ordinal} /> : null}
          {column.name}
        </span>
      </Td>
      <Td>{column.unit ?? ""}</Td>
      <Td wrap className="min-w-36">
        {kindWords(column)}
      </Td>
      <Td align="right" className="figures">
        {formatCount(column.count)}
      </Td>
      <Td align="right" className="figures">
        {formatCount(column.missing)}
      </Td>
      <Td wrap className="min-w-40 break-words text-ink-2">
        {column.formula ?? column.origin}
        {column.geometryLevel ? <span className="block">geometry: {column.geometryLevel}</span> : null}
        {column.solvent ? <span className="block">in {column.solvent}</span> : null}
      </Td>
      {mayChange ? (
        <Td wrap className="print:hidden">
          <span className="grid justify-items-start gap-1 whitespace-nowrap">
            <ChangeColumn column={column} ensembleId={ensembleId} />
            {whyNoLevel(column) === null && !column.counter ? (
              <UseAsLevel column={column} ensembleId={ensembleId} />
            ) : null}
          </span>
        </Td>
      ) : null}
    </Tr>
  );
}

/** Name, kind, what the numbers cannot say of themselves; and removal, which can be undone. */
function ChangeColumn({ column, ensembleId }: { column: ColumnView; ensembleId: string }) {
  const [open, setOpen] = useState(false);
  const close = useCallback(() => setOpen(false), []);
  const change = useFetcher<ActAnswer>();
  const remove = useFetcher<ActAnswer>();
  const undo = useFetcher<ActAnswer>();
  const action = href("/ensembles/:id/columns", { id: ensembleId });
  const changed = change.data?.ok === true && change.state === "idle";
  const removed = remove.data?.ok === true;
  useEffect(() => {
    if (changed) setOpen(false);
  }, [changed]);
  const restore = undo.submit;
  useEffect(() => {
    if (!removed) return;
    const act = () => restore({ intent: "restore", column: column.id }, { method: "post", action });
    showToast({ tone: "done", text: `${column.name} was removed.`, action: { label: "Undo", act } });
  }, [removed, restore, column.id, column.name, action]);
  const energy = column.kind === "energy";
  const failed = [change, remove].find(({ data }) => data && !data.ok)?.data?.message;
  return (
    <Dialog
      open={open}
      onOpenChange={setOpen}
      trigger={<TextButton aria-label={`Change ${column.name}`}>Change</TextButton>}
      title={`Change ${column.name}`}
    >
      <change.Form method="post" action={action} className="grid gap-4">
        <input type="hidden" name="intent" value="change" />
        <input type="hidden" name="column" value={column.id} />
        <TextField
          label="Name"
          name="name"
          defaultValue={column.name}
          maxLength={120}
          required
          autoComplete="off"
          error={failed}
        />
        {energy ? (
          <>
            <SelectField
              label="Kind of energy"
              name="energyKind"
              defaultValue={column.energyKind ?? "electronic"}
              choices={Object.entries(ENERGY_KIND_WORDS).map(([value, label]) => ({ value, label }))}
              help="Electronic energies are weighted by copies, free energies by the mirror factor."
            />
            <TextField
              label="Temperature, of a free energy or an enthalpy"
              name="temperature"
              unit="K"
              inputMode="decimal"
              defaultValue={column.temperature ?? ""}
            />
            <TextField
              label="Level of the geometry, if another"
              name="geometryLevel"
              maxLength={120}
              defaultValue={column.geometryLevel ?? ""}
            />
          </>
        ) : null}
        <TextField label="Solvent" name="solvent" maxLength={120} defaultValue={column.solvent ?? ""} />
        <DialogFoot
          note={
            column.usedBy.length > 0
              ? `${column.usedBy.join(", ")} ${column.usedBy.length === 1 ? "is" : "are"} computed from it, so it cannot be removed.`
              : "A removed column can be brought back for thirty days."
          }
        >
          <SubmitButton pending={change.state !== "idle"}>Keep the changes</SubmitButton>
          <Button
            kind="stop"
            disabled={column.usedBy.length > 0 || remove.state !== "idle"}
            onClick={() => remove.submit({ intent: "remove", column: column.id }, { method: "post", action })}
          >
            Remove the column
          </Button>
        </DialogFoot>
      </change.Form>
      {energy && !column.computed ? (
        <UseAsProperty column={column} ensembleId={ensembleId} onDone={close} />
      ) : null}
    </Dialog>
  );
}
