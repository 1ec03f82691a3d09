import { data, href, redirect } from "react-router";
import { AccountForms } from "~/components/account/account-forms";
import { SessionTable } from "~/components/account/session-table";
import { TeamList } from "~/components/account/team-list";
import { AppShell, pageClass } from "~/components/layout/app-shell";
import type { ShellHandle } from "~/components/layout/breadcrumbs";
import { Finding } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { actorContext, cookieChangeContext, requestIdContext } from "~/context";
import { capital, pluralWord } from "~/lib/format";
import { callerOf } from "~/middleware/caller.server";
import { requireUserMiddleware } from "~/middleware/require-user.server";
import { readForm } from "~/routes/read-form.server";
import { askNewAddress, confirmAgain } from "~/services/account/change-address.server";
import { changePassword } from "~/services/account/change-password.server";
import { deleteAccount } from "~/services/account/delete-account.server";
import { chooseLetters, loadAccount, renameSelf } from "~/services/account/load-account.server";
import { endOwnSessions } from "~/services/account/sessions.server";
import { forPage, refuseForm } from "~/services/http.server";
import { restoreTeam } from "~/services/teams/delete-team.server";
import type { Route } from "./+types/account";

export const middleware: Route.MiddlewareFunction[] = [requireUserMiddleware];

export const meta: Route.MetaFunction = () => [{ title: "Your account · Lowlying" }];

export const handle: ShellHandle = { crumbs: () => [{ label: "Your account" }] };

/** Retry-After of a refusal. */
export const headers: Route.HeadersFunction = ({ actionHeaders }) => actionHeaders;

export async function loader({ context, url }: Route.LoaderArgs) {
  return forPage(context.get(requestIdContext), async () => ({
    account: await loadAccount(context.get(actorContext)),
    confirmed: url.searchParams.has("address"),
    now: new Date().toISOString(),
  }));
}

export interface AccountAnswer {
  intent?: string;
  ok?: boolean;
  done?: string;
  message?: string;
  fields?: Record<string, string>;
}

export async function action({ request, context }: Route.ActionArgs) {
  const actor = context.get(actorContext);
  const caller = callerOf(request, context);
  return forPage(context.get(requestIdContext), async () => {
    const form = await readForm(request);
    const text = (name: string) => String(form.get(name) ?? "");
    const intent = text("intent");
    const done = (words: string): AccountAnswer => ({ ok: true, intent, done: words });
    try {
      switch (intent) {
        case "name":
          await renameSelf({ actor, name: text("name") });
          return done("Saved.");
        case "password":
          await changePassword({ actor, current: text("current"), password: text("password"), caller });
          return done("The password is changed, and every other session ended.");
        case "address":
          await askNewAddress({ actor, email: text("email"), password: text("current"), caller });
          return done("A letter goes to the new address. The old one stays until the link in it is used.");
        case "confirm":
          await confirmAgain({ actor });
          return done("A letter goes to your address. The link in it confirms the address.");
        case "letters": {
          const wants = (name: string) => form.get(name) === "1";
          const letters = { jobs: wants("jobs"), links: wants("links"), digest: wants("digest") };
          await chooseLetters({ actor, letters });
          return done("Saved.");
        }
        case "session":
          await endOwnSessions({ actor, sessionId: text("session") });
          return done("That session is ended.");
        case "sessions":
          await endOwnSessions({ actor, sessionId: null });
          return done("All other sessions are ended.");
        case "team":
          await restoreTeam({ actor, teamId: text("team") });
          return done("The team is back.");
        case "delete":
          await deleteAccount({ actor, password: text("confirm"), caller });
          context.get(cookieChangeContext).change = { secret: null, stay: false };
          return redirect(href("/"), 303);
        default:
          return data({ message: "This form is not known here." } satisfies AccountAnswer, { status: 400 });
      }
    } catch (error) {
      return refuseForm(error, { intent });
    }
  });
}

export default function Page({ loaderData, actionData }: Route.ComponentProps) {
  const { account, confirmed, now } = loaderData;
  const answer = actionData as AccountAnswer | undefined;
  const teams = account.teams.length === 0 ? "no team yet" : pluralWord(account.teams.length, "team");
  const sessions = capital(pluralWord(account.sessions.length, "session"));
  return (
    <AppShell>
      <div className={`pt-8 pb-16 max-sm:pt-4 ${pageClass}`}>
        <h1 className="text-lg font-semibold tracking-title sm:text-xl">Your account</h1>
        <Finding wide>
          You belong to {teams}. {sessions} {account.sessions.length === 1 ? "is" : "are"} open.
        </Finding>
        {confirmed ? (
          <div role="status" className="mt-6">
            <Note tone="good">The address {account.email} is confirmed.</Note>
          </div>
        ) : null}
        <div className="mt-9 grid items-start gap-x-12 gap-y-9 lg:grid-cols-[minmax(0,1fr)_22.5rem]">
          <div className="grid gap-9">
            <SessionTable sessions={account.sessions} answer={answer} now={now} />
            <TeamList account={account} answer={answer} />
          </div>
          <AccountForms account={account} answer={answer} />
        </div>
      </div>
    </AppShell>
  );
}
