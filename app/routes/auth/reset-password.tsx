import { data, Form, href, redirect } from "react-router";
import { Door } from "~/components/layout/door";
import { ButtonLink, SubmitButton } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { requestIdContext } from "~/context";
import { callerOf } from "~/middleware/caller.server";
import { readForm } from "~/routes/read-form.server";
import { isResetOpen, resetPassword } from "~/services/auth/reset-password.server";
import { forPage, refuseForm } from "~/services/http.server";
import type { Route } from "./+types/reset-password";

export const meta: Route.MetaFunction = () => [
  { title: "Choose a new password · Lowlying" },
  { name: "robots", content: "noindex" },
];

/** Looking at the link uses nothing up: mail programs open links before people do. */
export async function loader({ params, context }: Route.LoaderArgs) {
  const open = await forPage(context.get(requestIdContext), () => isResetOpen(params.secret));
  return data({ open }, { status: open ? 200 : 404 });
}

export async function action({ request, params, context }: Route.ActionArgs) {
  const caller = callerOf(request, context);
  return forPage(context.get(requestIdContext), async () => {
    const password = String((await readForm(request)).get("password") ?? "");
    try {
      await resetPassword({ secret: params.secret, password, caller });
    } catch (error) {
      return refuseForm(error, {});
    }
    return redirect(`${href("/login")}?changed=1`, 303);
  });
}

export default function Page({ loaderData, actionData }: Route.ComponentProps) {
  if (!loaderData.open) {
    return (
      <Door
        rule="held"
        title="This link has ended"
        lead="It was used, is older than 30 minutes, or a newer one was sent."
      >
        <ButtonLink kind="primary" wide to={href("/reset-password")}>
          Ask for another
        </ButtonLink>
      </Door>
    );
  }
  return (
    <Door title="Choose a new password" foot="Your open sessions end when the password changes.">
      <Form method="post" className="grid gap-4">
        <TextField
          label="New password"
          name="password"
          type="password"
          autoComplete="new-password"
          required
          help="At least 12 characters; a sentence is fine."
          error={actionData ? (actionData.fields.password ?? actionData.message) : undefined}
        />
        <SubmitButton wide>Change the password</SubmitButton>
      </Form>
    </Door>
  );
}
