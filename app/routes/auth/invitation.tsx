import { data, Form, href, redirect } from "react-router";
import { Door, DoorAside } from "~/components/layout/door";
import { ButtonLink, SubmitButton } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { Note } from "~/components/ui/note";
import { TextButton, TextLink } from "~/components/ui/text-link";
import { actorContext, cookieChangeContext, requestIdContext } from "~/context";
import { formatDate } from "~/lib/format";
import { ROLE_WORDS } from "~/lib/people-words";
import { callerOf } from "~/middleware/caller.server";
import { readForm } from "~/routes/read-form.server";
import { forPage, refuseForm } from "~/services/http.server";
import { findInvitation, joinByPassword, joinSignedIn } from "~/services/people/accept-invitation.server";
import { findPerson } from "~/services/teams/find-person.server";
import type { Route } from "./+types/invitation";

export const meta: Route.MetaFunction = () => [
  { title: "Invitation · Lowlying" },
  { name: "robots", content: "noindex" },
];

/** Retry-After of a refusal. */
export const headers: Route.HeadersFunction = ({ actionHeaders }) => actionHeaders;

/** Looking uses nothing up: mail programs open links before people do. */
export async function loader({ params, context }: Route.LoaderArgs) {
  return forPage(context.get(requestIdContext), async () => {
    const [invitation, person] = await Promise.all([
      findInvitation(params.secret),
      findPerson(context.get(actorContext)),
    ]);
    return data({ invitation, signedInAs: person?.email ?? null }, { status: invitation ? 200 : 404 });
  });
}

export async function action({ request, params, context }: Route.ActionArgs) {
  const actor = context.get(actorContext);
  const caller = callerOf(request, context);
  return forPage(context.get(requestIdContext), async () => {
    const form = await readForm(request);
    const text = (name: string) => String(form.get(name) ?? "");
    try {
      if (actor.kind === "user") {
        const { teamId } = await joinSignedIn({ actor, secret: params.secret, caller });
        return redirect(href("/teams/:team", { team: teamId }), 303);
      }
      const joined = await joinByPassword({
        secret: params.secret,
        name: text("name"),
        password: text("password"),
        caller,
      });
      context.get(cookieChangeContext).change = { secret: joined.session, stay: false };
      return redirect(href("/teams/:team", { team: joined.teamId }), 303);
    } catch (error) {
      return refuseForm(error, { name: text("name") });
    }
  });
}

export default function Page({ loaderData, actionData }: Route.ComponentProps) {
  const { invitation, signedInAs } = loaderData;
  if (invitation === null) {
    return (
      <Door
        rule="held"
        title="No open invitation here"
        lead="An invitation works once and for seven days, and can be withdrawn. Or the address is not complete: open it from the letter itself."
        foot="An owner of the team can send another."
      >
        <ButtonLink kind="primary" wide to={href("/login")}>
          Sign in
        </ButtonLink>
      </Door>
    );
  }
  const { team, role, email, by, endsAt, known } = invitation;
  const other = signedInAs !== null && signedInAs !== email;
  return (
    <Door
      title={`Join ${team}`}
      lead={`${by ?? "An owner"} invites you as ${role}: ${ROLE_WORDS[role]}.`}
      foot={`The invitation was sent to ${email}. It works once, until ${formatDate(endsAt)}.`}
    >
      {actionData ? (
        <div role="alert">
          <Note tone="danger">{actionData.message}</Note>
        </div>
      ) : null}
      {other ? <OtherAccount email={email} signedInAs={signedInAs} /> : null}
      {signedInAs === email ? (
        <Form method="post">
          <SubmitButton wide>Join {team}</SubmitButton>
        </Form>
      ) : null}
      {signedInAs === null ? (
        <Form method="post" className="grid gap-4">
          <TextField label="Address" type="email" value={email} readOnly autoComplete="username" />
          {known ? null : (
            <TextField
              label="Name, as the logbook shows it"
              name="name"
              autoComplete="name"
              required
              maxLength={120}
              defaultValue={actionData?.name}
              error={actionData?.fields.name}
            />
          )}
          <TextField
            label="Password"
            aside={known ? <TextLink to={href("/reset-password")}>Forgotten?</TextLink> : undefined}
            name="password"
            type="password"
            autoComplete={known ? "current-password" : "new-password"}
            required
            help={known ? "Of your Lowlying account." : "At least 12 characters; a sentence is fine."}
            error={actionData?.fields.password}
          />
          <SubmitButton wide>Join {team}</SubmitButton>
        </Form>
      ) : null}
      <DoorAside>
        Not you? Close this page; nothing happens then.{" "}
        <TextLink to={href("/")}>Look at the example</TextLink>.
      </DoorAside>
    </Door>
  );
}

function OtherAccount({ email, signedInAs }: { email: string; signedInAs: string }) {
  return (
    <Note tone="mark">
      <p>
        It was sent to {email}, and you are signed in as {signedInAs}.
      </p>
      <Form method="post" action={href("/logout")} className="mt-1">
        <TextButton type="submit">Sign out</TextButton>, then open the link again.
      </Form>
    </Note>
  );
}
