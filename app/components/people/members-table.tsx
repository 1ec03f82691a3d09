import { href, useFetcher } from "react-router";
import { Badge } from "~/components/ui/badge";
import { BlockHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { formatDateShort, formatMoment } from "~/lib/format";
import type { PeopleAnswer } from "~/routes/team/people";
import type { InvitationRow, MemberRow, PeopleView } from "~/services/people/list-people.server";
import { LeaveOrRemove } from "./leave-or-remove";
import { RoleSelect } from "./role-select";
import { useAnswerToast } from "./use-answer-toast";

/** Members with their roles; invitations that wait come last, dashed. */
export function MembersTable({
  team,
  people,
  answer,
  now,
}: {
  team: string;
  people: PeopleView;
  answer: PeopleAnswer | undefined;
  now: string;
}) {
  const refused =
    answer && !answer.ok && ["role", "remove", "leave", "withdraw"].includes(answer.intent ?? "");
  return (
    <section>
      <BlockHead title={<span id="members">Members</span>} />
      {refused ? (
        <div role="alert" className="mb-4">
          <Note tone="danger">{answer.message}</Note>
        </div>
      ) : null}
      <Table aria-labelledby="members">
        <thead>
          <tr>
            <Th>Name</Th>
            <Th>Role</Th>
            <Th className="max-xl:hidden">Since</Th>
            <Th className="max-sm:hidden">Last seen</Th>
            {people.mayManage ? (
              <Th align="right" className="max-xl:hidden">
                Sessions
              </Th>
            ) : null}
            <Th>
              <span className="sr-only">Leave or remove</span>
            </Th>
          </tr>
        </thead>
        <tbody>
          {people.members.map((member) => (
            <MemberLine key={member.id} team={team} member={member} people={people} now={now} />
          ))}
          {people.invitations.map((invitation) => (
            <InvitationLine key={invitation.id} team={team} invitation={invitation} />
          ))}
        </tbody>
      </Table>
      <p className="mt-2 text-xs text-ink-3">
        A new role counts from the next thing the person does. Whoever is removed loses access at once; what
        they did stays in the logbook.
      </p>
    </section>
  );
}

function MemberLine({
  team,
  member,
  people,
  now,
}: {
  team: string;
  member: MemberRow;
  people: PeopleView;
  now: string;
}) {
  return (
    <Tr>
      <Td tall wrap>
        <span className="inline-flex flex-wrap items-center gap-2">
          <span className="font-semibold">{member.name}</span>
          {member.you ? <Badge>you</Badge> : null}
          {member.lastOwner ? <Badge>last owner</Badge> : null}
          {people.mayManage && member.tokensOnly ? <Badge>tokens only</Badge> : null}
        </span>
        <span className="block text-xs break-all text-ink-3">{member.email}</span>
      </Td>
      <Td tall>
        {people.mayManage ? (
          <RoleSelect team={team} member={member} />
        ) : (
          <span className="capitalize">{member.role}</span>
        )}
      </Td>
      <Td tall className="max-xl:hidden">
        {formatDateShort(member.since)}
      </Td>
      <Td tall className="max-sm:hidden">
        {member.seenAt === null ? (
          <span className="text-ink-3">{member.sessions === null ? "not shown" : "not signed in"}</span>
        ) : (
          formatMoment(member.seenAt, now)
        )}
      </Td>
      {people.mayManage ? (
        <Td tall align="right" className="figures max-xl:hidden">
          {member.sessions}
        </Td>
      ) : null}
      <Td tall align="right">
        <LeaveOrRemove team={team} member={member} mayManage={people.mayManage} />
      </Td>
    </Tr>
  );
}

function InvitationLine({ team, invitation }: { team: string; invitation: InvitationRow }) {
  const fetcher = useFetcher<PeopleAnswer>();
  useAnswerToast(fetcher.data, fetcher.state === "idle");
  const by = invitation.by === null ? "" : `, by ${invitation.by}`;
  return (
    <tr className="border-b border-dashed border-rule-2 text-ink-2">
      <Td tall wrap>
        <span className="break-all">{invitation.email}</span>
        <span className="block text-xs text-ink-3">
          invited {formatDateShort(invitation.createdAt)}
          {by}
          <span className="xl:hidden"> · ends {formatDateShort(invitation.endsAt)}</span>
        </span>
      </Td>
      <Td tall className="capitalize">
        {invitation.role}
      </Td>
      <Td tall className="max-xl:hidden">
        ends {formatDateShort(invitation.endsAt)}
      </Td>
      <Td tall className="max-sm:hidden">
        <Badge tone="ask">waits for an answer</Badge>
      </Td>
      <Td tall className="max-xl:hidden" />
      <Td tall align="right">
        <fetcher.Form method="post" action={href("/teams/:team/people", { team })}>
          <input type="hidden" name="intent" value="withdraw" />
          <input type="hidden" name="invitation" value={invitation.id} />
          <TextButton type="submit" aria-label={`Withdraw the invitation of ${invitation.email}`}>
            Withdraw
          </TextButton>
        </fetcher.Form>
      </Td>
    </tr>
  );
}
