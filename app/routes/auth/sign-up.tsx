import { Form, href, redirect } from "react-router";
import { Door, DoorAside } from "~/components/layout/door";
import { SubmitButton } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { Note } from "~/components/ui/note";
import { TextLink } from "~/components/ui/text-link";
import { actorContext, cookieChangeContext, requestIdContext } from "~/context";
import { env } from "~/env.server";
import { callerOf } from "~/middleware/caller.server";
import { writeTypedAddress } from "~/middleware/typed-address.server";
import { readForm } from "~/routes/read-form.server";
import { signOut } from "~/services/auth/sign-out.server";
import { signUp } from "~/services/auth/sign-up.server";
import { forPage, refuseForm } from "~/services/http.server";
import type { Route } from "./+types/sign-up";

export const meta: Route.MetaFunction = () => [{ title: "Sign up · Lowlying" }];

/** Retry-After of a refusal. */
export const headers: Route.HeadersFunction = ({ actionHeaders }) => actionHeaders;

export function loader({ context }: Route.LoaderArgs) {
  if (context.get(actorContext).kind === "user") throw redirect(href("/teams"));
  return { open: env().OPEN_SIGN_UP };
}

export async function action({ request, context }: Route.ActionArgs) {
  const caller = callerOf(request, context);
  return forPage(context.get(requestIdContext), async () => {
    const form = await readForm(request);
    const text = (name: string) => String(form.get(name) ?? "");
    const typed = { name: text("name"), email: text("email") };
    try {
      await signUp({ ...typed, password: text("password"), caller });
    } catch (error) {
      return refuseForm(error, typed);
    }
    // New or known, the address is answered alike: what follows is the door, not a room.
    await signOut(context.get(actorContext), caller.address);
    context.get(cookieChangeContext).change = { secret: null, stay: false };
    const headers = { "set-cookie": await writeTypedAddress(typed.email) };
    return redirect(`${href("/login")}?signed-up`, { status: 303, headers });
  });
}

export default function Page({ loaderData, actionData }: Route.ComponentProps) {
  if (!loaderData.open) {
    return (
      <Door title="Sign-up is by invitation" lead="An owner of your team can invite you.">
        <DoorAside>
          <TextLink to={href("/login")}>Sign in</TextLink> if you have an account, or{" "}
          <TextLink to={href("/")}>look at the example</TextLink> without one.
        </DoorAside>
      </Door>
    );
  }
  return (
    <Door title="Sign up" lead="You get a team of your own, with you as its owner. Then sign in.">
      {actionData ? (
        <div role="alert">
          <Note tone="danger">{actionData.message}</Note>
        </div>
      ) : null}
      <Form method="post" className="grid gap-4">
        <TextField
          label="Name, as the logbook shows it"
          name="name"
          autoComplete="name"
          required
          maxLength={120}
          defaultValue={actionData?.name}
          error={actionData?.fields.name}
        />
        <TextField
          label="Address"
          name="email"
          type="email"
          autoComplete="username"
          required
          defaultValue={actionData?.email}
          error={actionData?.fields.email}
        />
        <TextField
          label="Password"
          name="password"
          type="password"
          autoComplete="new-password"
          required
          help="At least 12 characters; a sentence is fine."
          error={actionData?.fields.password}
        />
        <SubmitButton wide>Sign up</SubmitButton>
      </Form>
      <DoorAside>
        Have an account? <TextLink to={href("/login")}>Sign in</TextLink>.
      </DoorAside>
    </Door>
  );
}
