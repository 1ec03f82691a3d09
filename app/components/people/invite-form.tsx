import { useEffect, useRef } from "react";
import { Form } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { Radio } from "~/components/ui/checkbox";
import { labelClass, TextField } from "~/components/ui/field";
import { Note } from "~/components/ui/note";
import { ROLE_WORDS } from "~/lib/people-words";
import type { PeopleAnswer } from "~/routes/team/people";

const ROLES = ["reader", "analyst", "owner"] as const;

/** Sends an invitation by mail. */
export function InviteForm({ days, answer }: { days: number; answer: PeopleAnswer | undefined }) {
  const mine = answer?.intent === "invite" ? answer : undefined;
  const form = useRef<HTMLFormElement>(null);
  useEffect(() => {
    if (mine?.ok) form.current?.reset();
  }, [mine]);
  return (
    <section className="rounded-md border border-rule-2 bg-sheet p-4 sm:px-6">
      <h2 className="text-base font-semibold">Invite somebody</h2>
      <Form ref={form} method="post" className="mt-4 grid gap-4">
        <input type="hidden" name="intent" value="invite" />
        <TextField
          label="Address"
          name="email"
          type="email"
          placeholder="name@laboratory.example"
          required
          autoComplete="off"
          error={mine?.ok ? undefined : (mine?.fields?.email ?? mine?.message)}
        />
        <fieldset>
          <legend className={labelClass}>Role</legend>
          <div className="mt-2 border-b border-rule">
            {ROLES.map((role) => (
              <label
                key={role}
                htmlFor={`role-${role}`}
                className="grid min-h-11 grid-cols-[1.25rem_minmax(0,1fr)] items-start gap-x-2 border-t border-rule py-2"
              >
                <Radio
                  id={`role-${role}`}
                  name="role"
                  value={role}
                  defaultChecked={role === "reader"}
                  className="translate-y-0.5"
                />
                <span>
                  <span className="font-medium capitalize">{role}</span>
                  <span className="block text-xs text-ink-3">{ROLE_WORDS[role]}</span>
                </span>
              </label>
            ))}
          </div>
        </fieldset>
        <SubmitButton wide>Send invitation</SubmitButton>
      </Form>
      {mine?.ok ? (
        <div role="status" className="mt-4">
          <Note tone="good">{mine.done}</Note>
        </div>
      ) : null}
      <p className="mt-4 text-xs text-ink-3">
        The mail names the team and you, never a compound. The invitation works once and ends in {days} days.
      </p>
    </section>
  );
}
