import { Form, href } from "react-router";
import { Door, DoorAside } from "~/components/layout/door";
import { SubmitButton } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { Note } from "~/components/ui/note";
import { StatePanel } from "~/components/ui/state-panel";
import { TextLink } from "~/components/ui/text-link";
import { requestIdContext } from "~/context";
import { callerOf } from "~/middleware/caller.server";
import { readForm } from "~/routes/read-form.server";
import { requestReset } from "~/services/auth/request-reset.server";
import { forPage, refuseForm } from "~/services/http.server";
import type { Route } from "./+types/forgot-password";

export const meta: Route.MetaFunction = () => [{ title: "Reset the password · Lowlying" }];

/** Retry-After of a refusal. */
export const headers: Route.HeadersFunction = ({ actionHeaders }) => actionHeaders;

export async function action({ request, context }: Route.ActionArgs) {
  return forPage(context.get(requestIdContext), async () => {
    const email = String((await readForm(request)).get("email") ?? "");
    try {
      await requestReset({ email, caller: callerOf(request, context) });
      return { sent: true as const, message: null };
    } catch (error) {
      return refuseForm(error, {});
    }
  });
}

export default function Page({ actionData }: Route.ComponentProps) {
  return (
    <Door
      title="Reset the password"
      lead="Write your address. If it has an account, a mail with a link goes there."
      foot="The same answer comes for every address."
    >
      {actionData?.message ? (
        <div role="alert">
          <Note tone="danger">{actionData.message}</Note>
        </div>
      ) : null}
      <Form method="post" className="grid gap-4">
        <TextField label="Address" name="email" type="email" autoComplete="username" required />
        <SubmitButton wide>Send the link</SubmitButton>
      </Form>
      {actionData && "sent" in actionData ? (
        <div role="status">
          <StatePanel title="Sent, if the address is known">
            The link works once, within 30 minutes. Your open sessions end when the password changes. Nothing
            there after five minutes? Send it again.
          </StatePanel>
        </div>
      ) : null}
      <DoorAside>
        Remembered it? <TextLink to={href("/login")}>Sign in</TextLink>.
      </DoorAside>
    </Door>
  );
}
