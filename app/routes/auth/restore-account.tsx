import { data, href, redirect } from "react-router";
import { LetterDoor } from "~/components/layout/letter-door";
import { requestIdContext } from "~/context";
import { callerOf } from "~/middleware/caller.server";
import { isRestoreOpen, restoreAccount } from "~/services/account/delete-account.server";
import { forPage, refuseForm } from "~/services/http.server";
import type { Route } from "./+types/restore-account";

export const meta: Route.MetaFunction = () => [
  { title: "Bring the account back · Lowlying" },
  { name: "robots", content: "noindex" },
];

/** Looking uses nothing up: mail programs open links before people do. */
export async function loader({ params, context }: Route.LoaderArgs) {
  const open = await forPage(context.get(requestIdContext), () => isRestoreOpen(params.secret));
  return data({ open }, { status: open ? 200 : 404 });
}

export async function action({ request, params, context }: Route.ActionArgs) {
  const caller = callerOf(request, context);
  return forPage(context.get(requestIdContext), async () => {
    try {
      await restoreAccount({ secret: params.secret, caller });
    } catch (error) {
      return refuseForm(error, {});
    }
    return redirect(href("/login"), 303);
  });
}

export default function Page({ loaderData, actionData }: Route.ComponentProps) {
  return (
    <LetterDoor
      open={loaderData.open}
      title="Bring the account back"
      lead="It opens with the password and the teams that it had. Its tokens stay ended."
      act="Bring it back"
      refused={actionData?.message}
      ended={{ lead: "It was used, or the 30 days are over.", to: href("/login"), label: "Sign in" }}
    />
  );
}
