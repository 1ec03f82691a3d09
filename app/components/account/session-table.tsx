import { Form } from "react-router";
import { Badge } from "~/components/ui/badge";
import { SubmitButton } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { formatDateShort, formatMoment } from "~/lib/format";
import type { AccountAnswer } from "~/routes/account";
import type { SessionRow } from "~/services/account/sessions.server";

/** Where one is signed in, with a way to end each session. Plain forms: it works without script. */
export function SessionTable({
  sessions,
  answer,
  now,
}: {
  sessions: readonly SessionRow[];
  answer: AccountAnswer | undefined;
  now: string;
}) {
  const mine = answer?.intent === "session" || answer?.intent === "sessions" ? answer : undefined;
  return (
    <section>
      <BlockHead title={<span id="sessions">Where you are signed in</span>}>
        {sessions.length > 1 ? (
          <Form method="post">
            <input type="hidden" name="intent" value="sessions" />
            <SubmitButton kind="stop" size="sm">
              End all others
            </SubmitButton>
          </Form>
        ) : null}
      </BlockHead>
      {mine ? (
        <div role="status" className="mb-4">
          <Note tone={mine.ok ? "good" : "danger"}>{mine.done ?? mine.message}</Note>
        </div>
      ) : null}
      <Table aria-labelledby="sessions">
        <thead>
          <tr>
            <Th>Browser</Th>
            <Th className="max-sm:hidden">Since</Th>
            <Th>Last used</Th>
            <Th className="max-sm:hidden">Ends</Th>
            <Th>
              <span className="sr-only">End</span>
            </Th>
          </tr>
        </thead>
        <tbody>
          {sessions.map((session) => (
            <Tr key={session.id}>
              <Td tall wrap>
                <span className="inline-flex flex-wrap items-center gap-2">
                  {session.browser}
                  {session.here ? <Badge>this one</Badge> : null}
                </span>
              </Td>
              <Td tall className="max-sm:hidden">
                {formatMoment(session.createdAt, now)}
              </Td>
              <Td tall>{session.here ? "now" : formatMoment(session.seenAt, now)}</Td>
              <Td tall className="max-sm:hidden">
                {session.stay ? formatDateShort(session.endsAt) : "12 hours after its last use"}
              </Td>
              <Td tall align="right">
                {session.here ? null : (
                  <Form method="post">
                    <input type="hidden" name="intent" value="session" />
                    <input type="hidden" name="session" value={session.id} />
                    <TextButton type="submit" aria-label={`End the session of ${session.browser}`}>
                      End
                    </TextButton>
                  </Form>
                )}
              </Td>
            </Tr>
          ))}
        </tbody>
      </Table>
    </section>
  );
}
