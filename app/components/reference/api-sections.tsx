import type { ReactNode } from "react";
import type { ReferenceSection } from "~/components/layout/reference-page";
import { Badge } from "~/components/ui/badge";
import { CopyButton } from "~/components/ui/copy-button";
import { labelClass } from "~/components/ui/field";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { linkClass } from "~/components/ui/text-link";
import type { CallView } from "~/lib/api/describe-calls";
import push from "~/lib/api/examples/push-ensembles.sh?raw";
import read from "~/lib/api/examples/read_populations.py?raw";
import { formatCount } from "~/lib/format";

export interface ApiLimits {
  origin: string;
  calls: number;
  uploads: number;
  anonymous: number;
}

/** The reference of the API: how to begin, two programs to copy, then every call. */
export function apiSections(calls: readonly CallView[], limits: ApiLimits): ReferenceSection[] {
  return [
    { id: "begin", title: "How to begin", body: <Begin limits={limits} /> },
    { id: "shell", title: "Sending from a batch job", body: <Shell /> },
    { id: "python", title: "Reading in Python", body: <Python /> },
    { id: "refusals", title: "Refusals and limits", body: <Refusals limits={limits} /> },
    ...calls.map((call) => ({
      id: call.id,
      title: (
        <>
          <span className="block text-xs font-medium text-ink-3">{call.summary}</span>
          <code className="break-all">
            {call.method} {call.path}
          </code>
        </>
      ),
      name: call.summary,
      body: <Call call={call} />,
    })),
  ];
}

function Begin({ limits }: { limits: ApiLimits }) {
  return (
    <>
      <p>
        A member of a team makes a token on the team’s page of tokens. It acts as its person within that one
        team, at most with that person’s role, and never on people, editions or links. It may be narrowed to
        reading, or to adding files.
      </p>
      <p>
        Keep it in a file that only you can read, so that it stands in no list of processes, and send that
        file as a header:
      </p>
      <Listing
        label="Who is there"
        text={[
          "umask 077",
          "printf 'Authorization: Bearer %s\\n' 'lowl_…' > token.txt",
          `curl --fail-with-body -H @token.txt ${limits.origin}/api/v1/ensembles`,
        ].join("\n")}
      />
      <p>
        Energies are kcal/mol (but for <code>energyUnit</code> and a level’s own <code>unit</code>), lengths
        Å, temperatures K. Frames count from 1 in file order, on through all files of an upload. A level is
        given by its id or its name.{" "}
        <a className={linkClass} href="/api/v1/openapi.json">
          The same as OpenAPI 3.1
        </a>
        .
      </p>
    </>
  );
}

function Shell() {
  return (
    <>
      <p>
        Every call is safe to repeat: the same bytes with the same answers are the same ensemble, the same
        recipe on the same accepted frames is the same sift. Columns whose names are in use are refused (409);
        with <code>replace=true</code> the same table again changes nothing. A job that was cut off is simply
        run again.
      </p>
      <Listing label="push-ensembles.sh" text={push} />
      <p>
        Each file’s JSON line and the exit code say which it was: taken (0), waiting for somebody to look at
        held frames or open questions (3), refused (1), or unsent and to be run again (4).
      </p>
      <p>In a job array each task sends its own file; the name of the series keeps them together:</p>
      <Listing
        label="One task of a job array"
        text={[
          'gzip -nf "search.$TASK_ID.xyz"',
          'sh push-ensembles.sh "$HOME/token.txt" "run-$JOB_ID" MMFF94 kcal/mol "search.$TASK_ID.xyz.gz"',
        ].join("\n")}
      />
      <p>
        With <code>-n</code> gzip leaves out the time: without it the same structures compressed again are
        other bytes, and so a second ensemble.
      </p>
    </>
  );
}

function Python() {
  return (
    <>
      <p>
        Nothing but the standard library. <code>wait=30</code> holds an answer up to that many seconds, so
        that nobody has to poll.
      </p>
      <Listing label="read_populations.py" text={read} />
    </>
  );
}

function Refusals({ limits }: { limits: ApiLimits }) {
  return (
    <>
      <p>
        A refusal is <code>application/problem+json</code> (RFC 9457): <code>title</code> and{" "}
        <code>detail</code> in words, and <code>errors[]</code> with field, file, frame or line where one is
        at fault. What does not exist and what you may not see look alike: 404.
      </p>
      <ul>
        <li>{formatCount(limits.calls)} calls a minute a token</li>
        <li>{formatCount(limits.uploads)} uploads a minute a token</li>
        <li>{formatCount(limits.anonymous)} calls without a valid token a minute an address</li>
      </ul>
      <p>
        Beyond them the answer is 429 with <code>Retry-After</code>; curl’s <code>--retry</code> honours it.
      </p>
    </>
  );
}

function Call({ call }: { call: CallView }) {
  return (
    <div className="grid grid-cols-[minmax(0,1fr)] gap-4 text-sm">
      {call.fields.length > 0 ? (
        <Table aria-label={`Fields of ${call.method} ${call.path}`}>
          <thead>
            <tr>
              <Th>Field</Th>
              <Th className="max-sm:hidden">In</Th>
              <Th>What</Th>
            </tr>
          </thead>
          <tbody>
            {call.fields.map((field) => (
              <Tr key={`${field.place} ${field.name}`}>
                <Td wrap className="align-top">
                  <code className="mr-2 sm:whitespace-nowrap">{field.name}</code>
                  {field.required ? (
                    <span className="inline-block">
                      <Badge>needed</Badge>
                    </span>
                  ) : null}
                </Td>
                <Td wrap className="align-top text-ink-2 max-sm:hidden">
                  <span className="whitespace-nowrap">{field.place}</span>
                </Td>
                <Td wrap className="align-top">
                  {field.words}
                  <span className="block text-xs [overflow-wrap:anywhere] text-ink-3">{field.type}</span>
                </Td>
              </Tr>
            ))}
          </tbody>
        </Table>
      ) : null}
      <ul className="grid gap-1">
        {call.answers.map((answer) => (
          <li key={answer.status} className="grid grid-cols-[3rem_minmax(0,1fr)]">
            <span className="figures font-medium">{answer.status}</span>
            <span className="text-ink-2">{answer.words}</span>
          </li>
        ))}
      </ul>
    </div>
  );
}

function Listing({ label, text }: { label: string; text: string }): ReactNode {
  return (
    // Wider than text where there is room: a line of a program is read whole.
    <div className="xl:w-[54rem]">
      <div className="mb-2 flex items-baseline justify-between gap-4 text-sm">
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
