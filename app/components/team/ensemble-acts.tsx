import { Ellipsis } from "lucide-react";
import { type RefObject, useEffect, useRef, useState } from "react";
import { href, useFetcher } from "react-router";
import { Button, IconButton, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import { Menu, MenuItem, MenuRule } from "~/components/ui/menu";
import { SelectField } from "~/components/ui/select-field";
import type { EnsembleRow } from "~/lib/views";

/** What the action of the series page answers. */
export interface ActAnswer {
  ok?: boolean;
  /** What went wrong, for people. */
  message?: string;
  /** Of a series that was made. */
  seriesId?: string;
}

interface Props {
  row: EnsembleRow;
  team: string;
  series: readonly { id: string; name: string }[];
  /** Deletes; null for who may not. */
  onDelete: ((row: EnsembleRow) => void) | null;
}

/** Rename, move, delete: the menu at the end of a row. */
export function EnsembleActs({ row, team, series, onDelete }: Props) {
  const [open, setOpen] = useState(false);
  const [what, setWhat] = useState<"rename" | "move">("rename");
  const button = useRef<HTMLButtonElement>(null);
  const ask = (act: "rename" | "move") => {
    setWhat(act);
    setOpen(true);
  };
  return (
    <>
      <Menu
        label={`Acts on ${row.name}`}
        trigger={
          <IconButton ref={button} label={`Acts on ${row.name}`}>
            <Ellipsis aria-hidden="true" />
          </IconButton>
        }
      >
        <MenuItem onSelect={() => ask("rename")}>Rename…</MenuItem>
        {series.length > 1 ? <MenuItem onSelect={() => ask("move")}>Move to a series…</MenuItem> : null}
        {onDelete ? (
          <>
            <MenuRule />
            <MenuItem tone="stop" onSelect={() => onDelete(row)}>
              Delete ensemble
            </MenuItem>
          </>
        ) : null}
      </Menu>
      <ActDialog
        open={open}
        onClose={() => setOpen(false)}
        returnTo={button}
        row={row}
        team={team}
        what={what}
        series={series}
      />
    </>
  );
}

function ActDialog({
  open,
  onClose,
  returnTo,
  ...form
}: Omit<Props, "onDelete"> & {
  open: boolean;
  onClose: () => void;
  returnTo: RefObject<HTMLElement | null>;
  what: "rename" | "move";
}) {
  return (
    <Dialog
      open={open}
      onOpenChange={(next) => !next && onClose()}
      title={actLabel(form.what)}
      returnTo={returnTo}
    >
      <ActForm {...form} onClose={onClose} />
    </Dialog>
  );
}

const actLabel = (what: "rename" | "move") => (what === "rename" ? "Rename ensemble" : "Move ensemble");

/** Lives as long as its dialog is open, so that no refusal of last time stands in it. */
function ActForm({
  row,
  team,
  series,
  what,
  onClose,
}: Omit<Props, "onDelete"> & { what: "rename" | "move"; onClose: () => void }) {
  const fetcher = useFetcher<ActAnswer>();
  const { state, data } = fetcher;
  useOnceDone(state === "idle" && data?.ok === true, onClose);
  return (
    <fetcher.Form method="post" action={`${href("/teams/:team", { team })}?index`} className="grid gap-4">
      <input type="hidden" name="intent" value={what} />
      <input type="hidden" name="ensemble" value={row.id} />
      {what === "rename" ? (
        <TextField
          label="Name"
          name="name"
          defaultValue={row.name}
          required
          maxLength={200}
          autoComplete="off"
          error={data?.message}
        />
      ) : (
        <SelectField
          label="Series"
          name="series"
          defaultValue={row.series.id}
          choices={series.map(({ id, name }) => ({ value: id, label: name }))}
          error={data?.message}
        />
      )}
      <DialogFoot note="The logbook keeps what it was before.">
        <SubmitButton pending={state !== "idle"} pendingLabel="Saving">
          {actLabel(what)}
        </SubmitButton>
        <Button kind="quiet" onClick={onClose}>
          Cancel
        </Button>
      </DialogFoot>
    </fetcher.Form>
  );
}

/** Calls back when something has come true. */
export function useOnceDone(done: boolean, act: () => void): void {
  const latest = useRef(act);
  useEffect(() => {
    latest.current = act;
  });
  useEffect(() => {
    if (done) latest.current();
  }, [done]);
}
