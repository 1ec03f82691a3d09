import { Form } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { BlockHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import type { PeopleAnswer } from "~/routes/team/people";
import type { TeamView } from "~/services/teams/load-team.server";

/** Name of the team, longest life of its links, and its deletion: an owner's alone. */
export function TeamSettings({ team, answer }: { team: TeamView; answer: PeopleAnswer | undefined }) {
  const settings = answer?.intent === "settings" ? answer : undefined;
  const deletion = answer?.intent === "delete" ? answer : undefined;
  return (
    <section>
      <BlockHead title="The team" />
      <div className="grid gap-8 border-t border-rule pt-4">
        <Form method="post" className="grid items-start gap-4 sm:grid-cols-[minmax(0,1fr)_12rem_auto]">
          <input type="hidden" name="intent" value="settings" />
          <TextField
            label="Name"
            name="name"
            defaultValue={team.name}
            required
            maxLength={120}
            error={settings?.fields?.name}
          />
          <TextField
            label="A link lives at most"
            name="linkDays"
            type="number"
            min={1}
            max={366}
            unit="days"
            defaultValue={team.linkDays}
            required
            error={settings?.fields?.linkDays}
          />
          <div className="sm:pt-6">
            <SubmitButton kind="plain">Save</SubmitButton>
          </div>
          {settings?.ok ? (
            <div role="status" className="sm:col-span-3">
              <Note tone="good">Saved. Links that live keep their end.</Note>
            </div>
          ) : null}
        </Form>
        <Form method="post" className="grid items-start gap-4 sm:grid-cols-[minmax(0,1fr)_auto]">
          <input type="hidden" name="intent" value="delete" />
          <TextField
            label={`Write ${team.name} to delete the team with all it holds`}
            name="confirm"
            autoComplete="off"
            required
            help="Pages, tokens and read-only links end at once. An owner can bring the team back for 30 days."
            error={deletion?.message}
          />
          <div className="sm:pt-6">
            <SubmitButton kind="stop">Delete the team</SubmitButton>
          </div>
        </Form>
      </div>
    </section>
  );
}
