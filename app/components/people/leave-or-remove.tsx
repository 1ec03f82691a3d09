import { useState } from "react";
import { Form, href, useFetcher } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { TextButton } from "~/components/ui/text-link";
import type { PeopleAnswer } from "~/routes/team/people";
import type { MemberRow } from "~/services/people/list-people.server";
import { useAnswerToast } from "./use-answer-toast";

/** The way out of a team: one's own, or an owner's for somebody else. Asks first. */
export function LeaveOrRemove({
  team,
  member,
  mayManage,
}: {
  team: string;
  member: MemberRow;
  mayManage: boolean;
}) {
  if (member.lastOwner) return <span className="text-xs text-ink-3">cannot leave</span>;
  if (member.you) return <Leave team={team} />;
  return mayManage ? <Remove team={team} member={member} /> : null;
}

function Leave({ team }: { team: string }) {
  return (
    <Dialog
      trigger={<TextButton>Leave…</TextButton>}
      title="Leave the team"
      description="You lose access at once, and your tokens of this team end. An owner can invite you again."
    >
      <Form method="post" action={href("/teams/:team/people", { team })}>
        <input type="hidden" name="intent" value="leave" />
        <DialogFoot>
          <SubmitButton kind="stop">Leave the team</SubmitButton>
        </DialogFoot>
      </Form>
    </Dialog>
  );
}

function Remove({ team, member }: { team: string; member: MemberRow }) {
  const [open, setOpen] = useState(false);
  const fetcher = useFetcher<PeopleAnswer>();
  useAnswerToast(fetcher.data, fetcher.state === "idle");
  return (
    <Dialog
      open={open}
      onOpenChange={setOpen}
      trigger={<TextButton aria-label={`Remove ${member.name}`}>Remove…</TextButton>}
      title={`Remove ${member.name}`}
      description={`${member.name} loses access at once, and their tokens of this team end. What they did stays; they can be invited again.`}
    >
      <fetcher.Form
        method="post"
        action={href("/teams/:team/people", { team })}
        onSubmit={() => setOpen(false)}
      >
        <input type="hidden" name="intent" value="remove" />
        <input type="hidden" name="person" value={member.id} />
        <DialogFoot>
          <SubmitButton kind="stop" pending={fetcher.state !== "idle"}>
            Remove from the team
          </SubmitButton>
          <Button kind="quiet" onClick={() => setOpen(false)}>
            Keep
          </Button>
        </DialogFoot>
      </fetcher.Form>
    </Dialog>
  );
}
