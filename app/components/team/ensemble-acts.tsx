import { Ellipsis } from "lucide-react";
import { useEffect, useRef, useState } from "react";
import { href, useFetcher } from "react-router";
import { Button, IconButton, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import { Menu, MenuItem, MenuRule } from "~/components/ui/menu";
import { SelectField } from "~/components/ui/select-field";
import { showToast } from "~/components/ui/toast";
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
  /** Owners delete. */
  mayDelete: boolean;
}

/** Rename, move, delete: the menu at the end of a row. */
export function EnsembleActs({ row, team, series, mayDelete }: Props) {
  const [open, setOpen] = useState<"rename" | "move" | null>(null);
  const remove = useDeletion(team);
  return (
    <>
      <Menu
        label={`Acts on ${row.name}`}
        trigger={
          <IconButton label={`Acts on ${row.name}`}>
            <Ellipsis aria-hidden="true" />
          </IconButton>
        }
      >
        <MenuItem onSelect={() => setOpen("rename")}>Rename…</MenuItem>
        {series.length > 1 ? <MenuItem onSelect={() => setOpen("move")}>Move to a series…</MenuItem> : null}
        {mayDelete ? (
          <>
            <MenuRule />
            <MenuItem tone="stop" onSelect={() => remove(row)}>
              Delete ensemble
            </MenuItem>
          </>
        ) : null}
      </Menu>
      <ActDialog
        key={open}
        open={open !== null}
        onClose={() => setOpen(null)}
        row={row}
        team={team}
        what={open ?? "rename"}
        series={series}
      />
    </>
  );
}

function ActDialog({
  open,
  onClose,
  row,
  team,
  what,
  series,
}: Omit<Props, "mayDelete"> & { open: boolean; onClose: () => void; what: "rename" | "move" }) {
  const fetcher = useFetcher<ActAnswer>();
  useEffect(() => {
    if (fetcher.state === "idle" && fetcher.data?.ok) onClose();
  }, [fetcher.state, fetcher.data, onClose]);
  const label = what === "rename" ? "Rename ensemble" : "Move ensemble";
  return (
    <Dialog open={open} onOpenChange={(next) => !next && onClose()} title={label}>
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
            error={fetcher.data?.message}
          />
        ) : (
          <SelectField
            label="Series"
            name="series"
            defaultValue={row.series.id}
            choices={series.map(({ id, name }) => ({ value: id, label: name }))}
            error={fetcher.data?.message}
          />
        )}
        <DialogFoot note="The logbook keeps what it was before.">
          <SubmitButton pending={fetcher.state !== "idle"} pendingLabel="Saving">
            {label}
          </SubmitButton>
          <Button kind="quiet" onClick={onClose}>
            Cancel
          </Button>
        </DialogFoot>
      </fetcher.Form>
    </Dialog>
  );
}

/** Deletes at once and offers to take it back, as every act that takes something away. */
function useDeletion(team: string) {
  const removing = useFetcher<ActAnswer>();
  const restoring = useFetcher<ActAnswer>();
  const last = useRef<EnsembleRow | null>(null);
  const told = useRef<ActAnswer | undefined>(undefined);
  const action = `${href("/teams/:team", { team })}?index`;

  const { data } = removing;
  const { submit: restore } = restoring;
  useEffect(() => {
    const row = last.current;
    if (!data || told.current === data || !row) return;
    told.current = data;
    if (data.ok) {
      showToast({
        tone: "done",
        text: `${row.name} deleted.`,
        action: {
          label: "Undo",
          act: () => restore({ intent: "restore", ensemble: row.id }, { method: "post", action }),
        },
      });
    } else showToast({ tone: "failed", text: data.message ?? "Not deleted." });
  }, [data, restore, action]);

  const back = restoring.data;
  useEffect(() => {
    if (!back) return;
    const name = last.current?.name ?? "The ensemble";
    if (back.ok) showToast({ tone: "done", text: `${name} is back.` });
    else showToast({ tone: "failed", text: back.message ?? "Not restored." });
  }, [back]);

  return (row: EnsembleRow) => {
    last.current = row;
    removing.submit({ intent: "delete", ensemble: row.id }, { method: "post", action });
  };
}
