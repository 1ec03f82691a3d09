import { useId } from "react";
import { Form, href, redirect } from "react-router";
import { Door, DoorAside } from "~/components/layout/door";
import { SubmitButton } from "~/components/ui/button";
import { Checkbox } from "~/components/ui/checkbox";
import { TextField } from "~/components/ui/field";
import { Note } from "~/components/ui/note";
import { TextLink } from "~/components/ui/text-link";
import { actorContext, cookieChangeContext, requestIdContext } from "~/context";
import { env } from "~/env.server";
import { ownPath } from "~/lib/own-path";
import { callerOf } from "~/middleware/caller.server";
import { readTypedAddress } from "~/middleware/typed-address.server";
import { readForm } from "~/routes/read-form.server";
import { formAuthenticator } from "~/services/auth/authenticator.server";
import { signOut } from "~/services/auth/sign-out.server";
import { forPage, refuseForm } from "~/services/http.server";
import type { Route } from "./+types/login";

export const meta: Route.MetaFunction = () => [{ title: "Sign in · Lowlying" }];

/** Retry-After of a refusal. */
export const headers: Route.HeadersFunction = ({ actionHeaders }) => actionHeaders;

/** Where the form leads: the page that somebody wanted, else their teams. */
const target = (url: URL) => ownPath(url.searchParams.get("to"), href("/teams"));

export async function loader({ request, context, url }: Route.LoaderArgs) {
  if (context.get(actorContext).kind === "user") throw redirect(target(url));
  const { searchParams } = url;
  return {
    openSignUp: env().OPEN_SIGN_UP,
    changed: searchParams.has("changed"),
    signedUp: searchParams.has("signed-up"),
    typed: await readTypedAddress(request.headers.get("cookie")),
  };
}

export async function action({ request, context, url }: Route.ActionArgs) {
  const caller = callerOf(request, context);
  // The authenticator reads the body; what was typed comes back beside a refusal, but for the password.
  const copy = request.clone();
  return forPage(context.get(requestIdContext), async () => {
    try {
      const { secret, stay } = await formAuthenticator(caller).authenticate("form", request);
      await signOut(context.get(actorContext), caller.address);
      context.get(cookieChangeContext).change = { secret, stay };
    } catch (error) {
      const form = await readForm(copy);
      return refuseForm(error, { email: String(form.get("email") ?? "") });
    }
    return redirect(target(url), 303);
  });
}

export default function Page({ loaderData, actionData }: Route.ComponentProps) {
  const welcome = useId();
  const signedUp = loaderData.signedUp && !actionData;
  return (
    <Door title="Sign in" foot="After ten wrong tries an address rests for 15 minutes.">
      {loaderData.changed ? (
        <Note tone="good">
          The password was changed and every open session ended. Sign in with the new one.
        </Note>
      ) : null}
      {signedUp ? (
        <Note tone="good">
          <p id={welcome}>
            Your account is open: sign in with the address and password that you chose. If the address had an
            account before, nothing was changed, and a letter is on its way to it.
          </p>
        </Note>
      ) : null}
      {actionData ? (
        <div role="alert">
          <Note tone="danger">{actionData.message}</Note>
        </div>
      ) : null}
      <Form method="post" className="grid gap-4">
        <TextField
          label="Address"
          name="email"
          type="email"
          autoComplete="username"
          required
          defaultValue={actionData?.email ?? loaderData.typed}
        />
        <TextField
          label="Password"
          aside={<TextLink to={href("/reset-password")}>Forgotten?</TextLink>}
          name="password"
          type="password"
          autoComplete="current-password"
          required
          // The address is there already, from the form before; what stands above describes the field.
          autoFocus={signedUp && loaderData.typed !== undefined}
          aria-describedby={signedUp ? welcome : undefined}
        />
        <Checkbox name="stay" value="1">
          Stay signed in on this computer for 30 days
        </Checkbox>
        <SubmitButton wide>Sign in</SubmitButton>
      </Form>
      <DoorAside>
        {loaderData.openSignUp ? (
          <>
            No account? <TextLink to={href("/sign-up")}>Sign up</TextLink>, or{" "}
            <TextLink to={href("/")}>look at the example</TextLink> without one.
          </>
        ) : (
          <>
            No account? Sign-up is by invitation. <TextLink to={href("/")}>Look at the example</TextLink>{" "}
            without one.
          </>
        )}
      </DoorAside>
    </Door>
  );
}
