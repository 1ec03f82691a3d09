import { data, Form, href, redirect } from "react-router";
import { Door } from "~/components/layout/door";
import { ButtonLink, SubmitButton } from "~/components/ui/button";
import { Note } from "~/components/ui/note";
import { requestIdContext } from "~/context";
import { callerOf } from "~/middleware/caller.server";
import { confirmAddress, findAddressChange } from "~/services/account/change-address.server";
import { forPage, refuseForm } from "~/services/http.server";
import type { Route } from "./+types/confirm-address";

export const meta: Route.MetaFunction = () => [
  { title: "Confirm the address · Lowlying" },
  { name: "robots", content: "noindex" },
];

/** Looking uses nothing up: mail programs open links before people do. */
export async function loader({ params, context }: Route.LoaderArgs) {
  const email = await forPage(context.get(requestIdContext), () => findAddressChange(params.secret));
  return data({ email }, { status: email ? 200 : 404 });
}

export async function action({ request, params, context }: Route.ActionArgs) {
  const caller = callerOf(request, context);
  return forPage(context.get(requestIdContext), async () => {
    try {
      await confirmAddress({ secret: params.secret, caller });
    } catch (error) {
      return refuseForm(error, {});
    }
    return redirect(`${href("/account")}?address=1`, 303);
  });
}

export default function Page({ loaderData, actionData }: Route.ComponentProps) {
  if (loaderData.email === null) {
    return (
      <Door
        rule="held"
        title="This link has ended"
        lead="It was used, is older than a day, or a newer one was sent."
      >
        <ButtonLink kind="primary" wide to={href("/account")}>
          Go to your account
        </ButtonLink>
      </Door>
    );
  }
  return (
    <Door title="Confirm the address" lead={`Letters of your account go to ${loaderData.email}.`}>
      {actionData ? (
        <div role="alert">
          <Note tone="danger">{actionData.message}</Note>
        </div>
      ) : null}
      <Form method="post">
        <SubmitButton wide>Use this address</SubmitButton>
      </Form>
    </Door>
  );
}
