import type { ReactNode } from "react";
import { Form } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { Checkbox } from "~/components/ui/checkbox";
import { TextField } from "~/components/ui/field";
import { Note } from "~/components/ui/note";
import type { AccountAnswer } from "~/routes/account";
import type { AccountView } from "~/services/account/load-account.server";

/** Name, address, password, and the account's end. What a borrowed session must not do asks for the password again. */
export function AccountForms({
  account,
  answer,
}: {
  account: AccountView;
  answer: AccountAnswer | undefined;
}) {
  const of = (intent: string) => (answer?.intent === intent ? answer : undefined);
  const fault = (intent: string, field: string) => of(intent)?.fields?.[field];
  return (
    <div className="grid gap-6">
      <FormPanel title="Name" intent="name" answer={of("name")}>
        <TextField
          label="Name, as the logbook shows it"
          name="name"
          autoComplete="name"
          required
          maxLength={120}
          defaultValue={account.name}
          error={fault("name", "name")}
        />
        <SubmitButton kind="plain">Save the name</SubmitButton>
      </FormPanel>
      <FormPanel title="Password" intent="password" answer={of("password")}>
        <input type="hidden" autoComplete="username" value={account.email} readOnly />
        <TextField
          label="Current password"
          name="current"
          type="password"
          autoComplete="current-password"
          required
          error={fault("password", "current")}
        />
        <TextField
          label="New password"
          name="password"
          type="password"
          autoComplete="new-password"
          required
          help="At least 12 characters; a sentence is fine."
          error={fault("password", "password")}
        />
        <SubmitButton kind="plain">Change the password</SubmitButton>
      </FormPanel>
      {account.confirmed ? null : (
        <FormPanel title="Confirm the address" intent="confirm" answer={of("confirm")}>
          <p className="text-ink-2">
            <span className="break-all">{account.email}</span> is not confirmed yet. All works without, but a
            reset of the password goes there: use the link in the letter, or send another.
          </p>
          <SubmitButton kind="plain">Send the letter again</SubmitButton>
        </FormPanel>
      )}
      <FormPanel title="Address" intent="address" answer={of("address")}>
        <p className="text-ink-2">
          Letters go to <span className="break-all">{account.email}</span>.
        </p>
        <TextField
          label="New address"
          name="email"
          type="email"
          autoComplete="email"
          required
          error={fault("address", "email")}
        />
        <TextField
          label="Password"
          name="current"
          type="password"
          autoComplete="current-password"
          required
          error={fault("address", "current")}
        />
        <SubmitButton kind="plain">Change the address</SubmitButton>
      </FormPanel>
      <FormPanel title="Letters" intent="letters" answer={of("letters")}>
        <p className="text-ink-2">
          What concerns your account and its safety always comes. No letter names a compound or a file.
        </p>
        <Checkbox name="jobs" value="1" defaultChecked={account.letters.jobs}>
          An intake or a sift of mine took over two minutes and has ended
        </Checkbox>
        <Checkbox name="links" value="1" defaultChecked={account.letters.links}>
          A link that I made ends in three days
        </Checkbox>
        <Checkbox name="digest" value="1" defaultChecked={account.letters.digest}>
          Once a week, what happened in my teams, in counts
        </Checkbox>
        <SubmitButton kind="plain">Save the choice</SubmitButton>
      </FormPanel>
      <FormPanel title="Close the account" intent="delete" answer={of("delete")}>
        <p className="text-ink-2">
          Sessions and tokens end at once. A link in a letter brings the account back for 30 days; then it is
          removed. What you did stays in the logbooks, without your name.
        </p>
        <TextField
          label="Password"
          name="confirm"
          type="password"
          autoComplete="current-password"
          required
          error={fault("delete", "confirm")}
        />
        <SubmitButton kind="stop">Close the account</SubmitButton>
      </FormPanel>
    </div>
  );
}

function FormPanel({
  title,
  intent,
  answer,
  children,
}: {
  title: string;
  intent: string;
  answer: AccountAnswer | undefined;
  children: ReactNode;
}) {
  const general =
    answer && !answer.ok && Object.keys(answer.fields ?? {}).length === 0 ? answer.message : null;
  return (
    <section className="border-t border-rule pt-4">
      <h2 className="text-base font-semibold">{title}</h2>
      {/* A new key empties the fields once the act is done. */}
      <Form
        key={answer?.ok ? "done" : "open"}
        method="post"
        className="mt-4 grid gap-4 justify-items-stretch"
      >
        <input type="hidden" name="intent" value={intent} />
        {children}
      </Form>
      {answer?.ok ? (
        <div role="status" className="mt-4">
          <Note tone="good">{answer.done}</Note>
        </div>
      ) : null}
      {general ? (
        <div role="alert" className="mt-4">
          <Note tone="danger">{general}</Note>
        </div>
      ) : null}
    </section>
  );
}
