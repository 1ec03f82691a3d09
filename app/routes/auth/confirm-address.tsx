import { data, href, redirect } from "react-router";
import { LetterDoor } from "~/components/layout/letter-door";
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

export default function Page({ loaderData: { email }, actionData }: Route.ComponentProps) {
  return (
    <LetterDoor
      open={email !== null}
      title="Confirm the address"
      lead={`Letters of your account go to ${email}.`}
      act="Use this address"
      refused={actionData?.message}
      ended={{
        lead: "It was used, is older than a day, or a newer one was sent.",
        to: href("/account"),
        label: "Go to your account",
      }}
    />
  );
}
