import { Form, href } from "react-router";
import { BlockHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { StatePanel } from "~/components/ui/state-panel";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton, TextLink } from "~/components/ui/text-link";
import { formatDate } from "~/lib/format";
import type { AccountAnswer } from "~/routes/account";
import type { AccountView } from "~/services/account/load-account.server";

/** One's teams, and deleted ones that an owner can bring back. */
export function TeamList({ account, answer }: { account: AccountView; answer: AccountAnswer | undefined }) {
  const mine = answer?.intent === "team" ? answer : undefined;
  return (
    <section>
      <BlockHead title={<span id="teams">Your teams</span>} />
      {mine ? (
        <div role="status" className="mb-4">
          <Note tone={mine.ok ? "good" : "danger"}>{mine.done ?? mine.message}</Note>
        </div>
      ) : null}
      {account.teams.length + account.deletedTeams.length === 0 ? (
        <StatePanel title="No team yet">
          Ask an owner of a team for an invitation. Until then you can look at the example.
        </StatePanel>
      ) : (
        <Table aria-labelledby="teams">
          <thead>
            <tr>
              <Th>Team</Th>
              <Th>Role</Th>
              <Th>
                <span className="sr-only">Bring back</span>
              </Th>
            </tr>
          </thead>
          <tbody>
            {account.teams.map((team) => (
              <Tr key={team.id}>
                <Td tall wrap>
                  <TextLink to={href("/teams/:team", { team: team.id })}>{team.name}</TextLink>
                </Td>
                <Td tall className="capitalize">
                  {team.role}
                </Td>
                <Td tall />
              </Tr>
            ))}
            {account.deletedTeams.map((team) => (
              <Tr key={team.id} className="text-ink-2">
                <Td tall wrap>
                  {team.name}
                  <span className="block text-xs text-ink-3">
                    deleted; gone for good on {formatDate(team.until)}
                  </span>
                </Td>
                <Td tall>Owner</Td>
                <Td tall align="right">
                  <Form method="post">
                    <input type="hidden" name="intent" value="team" />
                    <input type="hidden" name="team" value={team.id} />
                    <TextButton type="submit" aria-label={`Bring ${team.name} back`}>
                      Bring back
                    </TextButton>
                  </Form>
                </Td>
              </Tr>
            ))}
          </tbody>
        </Table>
      )}
    </section>
  );
}
