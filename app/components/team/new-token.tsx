import { useState } from "react";
import { Form } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { Radio } from "~/components/ui/checkbox";
import { CopyButton } from "~/components/ui/copy-button";
import { labelClass, TextField } from "~/components/ui/field";
import { SelectField } from "~/components/ui/select-field";
import { formatDate } from "~/lib/format";
import type { Role } from "~/lib/views";
import type { TokenRow } from "~/services/tokens/list-tokens.server";

type Scope = TokenRow["scope"];

const SCOPES: readonly { scope: Scope; name: string; words: string }[] = [
  { scope: "add", name: "Add files only", words: "takes files in and sees only what it took in" },
  { scope: "read", name: "Read only", words: "sees all of the team and downloads, changes nothing" },
  { scope: "full", name: "All that you may", words: "your role in this team, at the time of each call" },
];

const DAYS = [
  { value: "7", label: "in 7 days" },
  { value: "30", label: "in 30 days" },
  { value: "90", label: "in 90 days" },
  { value: "366", label: "in a year" },
];

/** The form that makes a token. A reader's token reads. */
export function NewToken({ role, error }: { role: Role; error?: string }) {
  const offered = role === "reader" ? SCOPES.filter(({ scope }) => scope === "read") : SCOPES;
  const [scope, setScope] = useState<Scope>(offered[0]?.scope ?? "read");
  return (
    <section className="rounded-md border border-rule-2 bg-sheet p-4 sm:px-6">
      <h2 className="text-base font-semibold">New token</h2>
      <Form method="post" className="mt-4 grid gap-4">
        <input type="hidden" name="intent" value="make" />
        <TextField
          label="What it is for"
          name="name"
          placeholder="Night queue"
          required
          maxLength={120}
          autoComplete="off"
          error={error}
        />
        <fieldset>
          <legend className={labelClass}>It may</legend>
          <div className="mt-2 border-b border-rule">
            {offered.map((option) => (
              <label
                key={option.scope}
                htmlFor={`scope-${option.scope}`}
                className="grid min-h-11 grid-cols-[1.25rem_minmax(0,1fr)] items-start gap-x-2 border-t border-rule py-2"
              >
                <Radio
                  id={`scope-${option.scope}`}
                  name="scope"
                  value={option.scope}
                  checked={scope === option.scope}
                  onChange={() => setScope(option.scope)}
                  className="translate-y-0.5"
                />
                <span>
                  <span className="font-medium">{option.name}</span>
                  <span className="block text-xs text-ink-3">{option.words}</span>
                </span>
              </label>
            ))}
          </div>
        </fieldset>
        <SelectField label="Ends" name="days" defaultValue="30" choices={DAYS} />
        <SubmitButton wide>Make token</SubmitButton>
      </Form>
      <p className="mt-4 text-xs text-ink-3">
        It works in this team only, with at most your role, and never on people. Making and revoking stand in
        the logbook.
      </p>
    </section>
  );
}

export interface MadeToken {
  secret: string;
  name: string;
  scope: Scope;
  endsAt: string | null;
}

/** The new token, shown this once, with a call to try it by. */
export function MadeTokenPanel({ made, origin }: { made: MadeToken; origin: string }) {
  const example = curlExample(made.scope, origin);
  return (
    <section role="status" className="grid gap-4 border-t-3 border-good-edge pt-4">
      <div>
        <h2 className="text-sm font-semibold">{made.name} is made. Copy it now: it is shown this once.</h2>
        <p className="mt-1 text-ink-2">
          {made.endsAt ? `It ends on ${formatDate(made.endsAt)}. ` : ""}Only its checksum is stored here.
        </p>
      </div>
      <div className="grid items-end gap-2 sm:grid-cols-[minmax(0,1fr)_auto]">
        <TextField
          label="Token"
          readOnly
          value={made.secret}
          onFocus={(event) => event.currentTarget.select()}
        />
        <CopyButton text={made.secret} size="md">
          Copy token
        </CopyButton>
      </div>
      <Code label="Keep it in a file that only you can read" text={keepExample(made.secret)} />
      <Code label={made.scope === "read" ? "See what is there" : "Send a file"} text={example} />
    </section>
  );
}

/** curl reads the header from the file, so that the token stands in no list of processes. */
function keepExample(secret: string): string {
  return `umask 077\nprintf 'Authorization: Bearer %s\\n' '${secret}' > lowlying-token.txt`;
}

function curlExample(scope: Scope, origin: string): string {
  if (scope === "read") return `curl --fail-with-body -H @lowlying-token.txt ${origin}/api/v1/ensembles`;
  return [
    "curl --fail-with-body -H @lowlying-token.txt \\",
    "  -F level=MMFF94 -F energyUnit=kcal/mol \\",
    "  -F file=@ensemble.xyz.gz \\",
    `  ${origin}/api/v1/ensembles`,
  ].join("\n");
}

function Code({ label, text }: { label: string; text: string }) {
  return (
    <div>
      <div className="mb-2 flex items-baseline justify-between gap-4">
        <h3 className={labelClass}>{label}</h3>
        <CopyButton as="link" text={text}>
          Copy
        </CopyButton>
      </div>
      {/* biome-ignore lint/a11y/noNoninteractiveTabindex: it scrolls sideways, and keys must reach it */}
      <pre tabIndex={0} className="overflow-x-auto rounded-sm bg-sunk px-4 py-3 text-xs">
        <code>{text}</code>
      </pre>
    </div>
  );
}
