import { data, href, redirect } from "react-router";
import { pageClass } from "~/components/layout/app-shell";
import type { ShellHandle } from "~/components/layout/breadcrumbs";
import { InviteForm } from "~/components/people/invite-form";
import { MembersTable } from "~/components/people/members-table";
import { RoleTable } from "~/components/people/role-table";
import { TeamSettings } from "~/components/people/team-settings";
import { TeamTabs } from "~/components/team/team-tabs";
import { Finding } from "~/components/ui/finding";
import { actorContext, requestIdContext } from "~/context";
import { peopleFinding } from "~/lib/people-words";
import { readForm } from "~/routes/read-form.server";
import { listSeries } from "~/services/ensembles/list-series.server";
import { forPage, refuseForm } from "~/services/http.server";
import { changeRole } from "~/services/people/change-role.server";
import { invite, withdrawInvitation } from "~/services/people/invite.server";
import { listPeople } from "~/services/people/list-people.server";
import { INVITATION_DAYS, invitationSchema, roleSchema } from "~/services/people/people-fields";
import { removeMember } from "~/services/people/remove-member.server";
import { changeTeam, teamSchema } from "~/services/teams/change-team.server";
import { deleteTeam } from "~/services/teams/delete-team.server";
import { loadTeam } from "~/services/teams/load-team.server";
import type { Route } from "./+types/people";

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `People of ${loaderData?.team.name ?? "the team"} · Lowlying` }];
}

export const handle: ShellHandle = { crumbs: () => [{ label: "People" }] };

/** Retry-After of a refusal. */
export const headers: Route.HeadersFunction = ({ actionHeaders }) => actionHeaders;

export async function loader({ params, context }: Route.LoaderArgs) {
  const actor = context.get(actorContext);
  const teamId = params.team;
  return forPage(context.get(requestIdContext), async () => {
    const [team, series, people] = await Promise.all([
      loadTeam(actor, teamId),
      listSeries({ actor, teamId }),
      listPeople({ actor, teamId }),
    ]);
    return { team, series, people, days: INVITATION_DAYS, now: new Date().toISOString() };
  });
}

export interface PeopleAnswer {
  ok?: boolean;
  /** What was done, in words for a toast. */
  done?: string;
  message?: string;
  fields?: Record<string, string>;
  intent?: string;
}

/** Faults by field, as the forms show them beside the field. */
function badFields(error: { issues: readonly { path: PropertyKey[]; message: string }[] }, intent: string) {
  const fields = Object.fromEntries(error.issues.map(({ path, message }) => [String(path[0]), message]));
  const message = error.issues[0]?.message ?? "Fill in the form and send it again.";
  return data({ message, fields, intent } satisfies PeopleAnswer, { status: 400 });
}

export async function action({ request, params, context }: Route.ActionArgs) {
  const actor = context.get(actorContext);
  const teamId = params.team;
  return forPage(context.get(requestIdContext), async () => {
    const form = await readForm(request);
    const text = (name: string) => String(form.get(name) ?? "");
    const intent = text("intent");
    try {
      switch (intent) {
        case "invite": {
          const asked = invitationSchema.safeParse({ email: text("email"), role: text("role") });
          if (!asked.success) return badFields(asked.error, intent);
          await invite({ actor, teamId, ...asked.data });
          return {
            ok: true,
            intent,
            done: `An invitation goes to ${asked.data.email}.`,
          } satisfies PeopleAnswer;
        }
        case "withdraw":
          await withdrawInvitation({ actor, teamId, invitationId: text("invitation") });
          return { ok: true, intent, done: "The invitation is withdrawn; its link leads nowhere now." };
        case "role": {
          const role = roleSchema.safeParse(text("role"));
          if (!role.success) return badFields(role.error, intent);
          await changeRole({ actor, teamId, userId: text("person"), role: role.data });
          return { ok: true, intent, done: `The role is ${role.data} now.` };
        }
        case "remove":
          await removeMember({ actor, teamId, userId: text("person") });
          return { ok: true, intent, done: "Removed. What the person did stays in the logbook." };
        case "leave":
          if (actor.kind === "user") await removeMember({ actor, teamId, userId: actor.userId });
          return redirect(href("/account"), 303);
        case "settings": {
          const asked = teamSchema.safeParse({ name: text("name"), linkDays: text("linkDays") });
          if (!asked.success) return badFields(asked.error, intent);
          await changeTeam({ actor, teamId, team: asked.data });
          return { ok: true, intent, done: "Saved." };
        }
        case "delete":
          await deleteTeam({ actor, teamId, name: text("confirm") });
          return redirect(href("/account"), 303);
        default:
          return data({ message: "This form is not known here." } satisfies PeopleAnswer, { status: 400 });
      }
    } catch (error) {
      return refuseForm(error, { intent });
    }
  });
}

export default function Page({ loaderData, actionData }: Route.ComponentProps) {
  const { team, series, people, days, now } = loaderData;
  const answer = actionData as PeopleAnswer | undefined;
  return (
    <div className={`pt-8 pb-16 max-sm:pt-4 ${pageClass}`}>
      <h1 className="text-lg font-semibold tracking-title sm:text-xl">People of {team.name}</h1>
      <Finding wide>{peopleFinding(people)}</Finding>
      <TeamTabs team={team.id} series={series} chosen={null} at="people" />
      <div className="mt-8 grid items-start gap-x-12 gap-y-9 lg:grid-cols-[minmax(0,1fr)_20rem] lg:grid-rows-[auto_1fr] xl:grid-cols-[minmax(0,1fr)_22.5rem]">
        <div className="min-w-0">
          <MembersTable team={team.id} people={people} answer={answer} now={now} />
        </div>
        {/* On a phone before the settings: whoever invites need not pass the team's deletion. */}
        <aside className="grid gap-8 lg:col-start-2 lg:row-span-2 lg:row-start-1">
          {people.mayManage ? <InviteForm days={days} answer={answer} /> : null}
          <RoleTable />
        </aside>
        {people.mayManage ? (
          <div className="min-w-0">
            <TeamSettings team={team} answer={answer} />
          </div>
        ) : null}
      </div>
    </div>
  );
}
