import { Link2 } from "lucide-react";
import { useState } from "react";
import { useFetcher } from "react-router";
import { useShellData } from "~/components/layout/shell-data";
import { Button, SubmitButton } from "~/components/ui/button";
import { Checkbox } from "~/components/ui/checkbox";
import { CopyButton } from "~/components/ui/copy-button";
import { Dialog, DialogClose, DialogFoot } from "~/components/ui/dialog";
import { TextField } from "~/components/ui/field";
import { SelectField } from "~/components/ui/select-field";
import type { EditionRow } from "~/lib/edition/views";
import { formatDateTime, plural } from "~/lib/format";
import type { HandOverAnswer } from "./answer";

const CONTACT_MOST = 200;

/** Makes a link: for whom, until when, with what; then shows its address once. */
export function LinkDialog({ editions, linkDays }: { editions: readonly EditionRow[]; linkDays: number }) {
  const [open, setOpen] = useState(false);
  // A new fetcher at every opening forgets the address of the one before.
  const [turn, setTurn] = useState(0);
  const change = (to: boolean) => {
    setOpen(to);
    if (to) setTurn(turn + 1);
  };
  return (
    <Dialog
      open={open}
      onOpenChange={change}
      trigger={
        <Button size="sm" icon={<Link2 aria-hidden="true" />}>
          New link
        </Button>
      }
      title="New link"
      description="Whoever has the address sees one edition, without an account."
    >
      <LinkForm key={turn} editions={editions} linkDays={linkDays} />
    </Dialog>
  );
}

function LinkForm({ editions, linkDays }: { editions: readonly EditionRow[]; linkDays: number }) {
  const fetcher = useFetcher<HandOverAnswer>();
  const { data, state } = fetcher;
  const { user } = useShellData();
  if (data?.made) return <MadeLink made={data.made} />;
  const fields = data?.fields ?? {};
  return (
    <fetcher.Form method="post" className="grid gap-4">
      <input type="hidden" name="intent" value="make-link" />
      <TextField
        label="For whom"
        name="label"
        required
        maxLength={120}
        autoComplete="off"
        placeholder="Partner laboratory"
        error={fields.label}
      />
      <div className="grid gap-4 sm:grid-cols-2">
        <SelectField
          label="Shows"
          name="number"
          choices={editions.map(({ number, title }) => ({
            value: String(number),
            label: title ? `edition ${number}, ${title}` : `edition ${number}`,
          }))}
        />
        <TextField
          label="Ends in"
          name="days"
          type="number"
          inputMode="numeric"
          min={1}
          max={linkDays}
          defaultValue={Math.min(14, linkDays)}
          required
          unit="days"
          help={`At most ${plural(linkDays, "day")} in this team.`}
          error={fields.days}
        />
      </div>
      <TextField
        label="Whom to ask once it has ended"
        name="contact"
        maxLength={CONTACT_MOST}
        defaultValue={user ? `${user.name}, ${user.email}`.slice(0, CONTACT_MOST) : ""}
        placeholder="Your name, and how you are reached"
        help="Whoever opens the ended link reads this line; nothing else of you is shown."
        error={fields.contact}
      />
      <TextField
        label="Send it by letter to"
        name="email"
        type="email"
        autoComplete="off"
        placeholder="name@laboratory.example"
        help="May stay empty. The letter holds the address and its end date, no name of a compound."
        error={fields.email}
      />
      <div className="grid gap-2">
        <Checkbox name="sources" value="1">
          Let them download the source files
        </Checkbox>
        <Checkbox name="logbook" value="1">
          Show the decisions of the logbook up to the edition, without names
        </Checkbox>
      </div>
      {data?.message !== undefined && Object.keys(fields).length === 0 ? (
        <p role="alert" className="text-danger">
          {data.message}
        </p>
      ) : null}
      <DialogFoot>
        <SubmitButton pending={state !== "idle"} pendingLabel="Making">
          Make link
        </SubmitButton>
        <DialogClose asChild>
          <Button kind="quiet">Cancel</Button>
        </DialogClose>
      </DialogFoot>
    </fetcher.Form>
  );
}

function MadeLink({ made }: { made: NonNullable<HandOverAnswer["made"]> }) {
  return (
    <div role="status" className="grid gap-4 border-t-3 border-good-edge pt-4">
      <p className="figures">
        The link for {made.label} shows edition {made.edition} and ends {formatDateTime(made.endsAt)}.
        {made.mailedTo === null ? null : ` A letter with it goes to ${made.mailedTo}.`} Copy it now: it is
        shown this once, and kept nowhere.
      </p>
      <div className="grid items-end gap-2 sm:grid-cols-[minmax(0,1fr)_auto]">
        <TextField
          label="Address"
          readOnly
          value={made.address}
          onFocus={(event) => event.currentTarget.select()}
        />
        <CopyButton text={made.address} size="md">
          Copy address
        </CopyButton>
      </div>
      <DialogFoot>
        <DialogClose asChild>
          <Button>Done</Button>
        </DialogClose>
      </DialogFoot>
    </div>
  );
}
