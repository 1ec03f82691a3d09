import { Form, href, isRouteErrorResponse, useLocation } from "react-router";
import { Button, ButtonLink } from "~/components/ui/button";
import { CopyButton } from "~/components/ui/copy-button";
import { TextButton } from "~/components/ui/text-link";
import { Door } from "./door";
import { type ShellData, useShellData } from "./shell-data";

type User = ShellData["user"];

/** No such address, or no access: the two read alike. */
export function NothingHere({ user }: { user: User }) {
  return (
    <Door
      rule="plain"
      title="Nothing here"
      lead="This address does not exist, or you have no access to it."
      foot={user ? <SignedInAs user={user} /> : "Only people of a team see what the team holds."}
    >
      <p className="text-ink-2">
        Which of the two is not told, so that names stay private. An owner of the team can let you in.
      </p>
      <div className="grid gap-2">
        {user ? (
          <ButtonLink kind="primary" wide to={href("/teams")}>
            Back to your teams
          </ButtonLink>
        ) : (
          <ButtonLink kind="primary" wide to={href("/login")}>
            Sign in
          </ButtonLink>
        )}
        <ButtonLink wide to={href("/")}>
          Look at the example
        </ButtonLink>
      </div>
    </Door>
  );
}

function SignedInAs({ user }: { user: NonNullable<User> }) {
  return (
    <Form method="post" action={href("/logout")}>
      Signed in as {user.email}. <TextButton type="submit">Use another account</TextButton>
    </Form>
  );
}

/** Something was asked that this person, or this moment, does not allow; the words are the server's own. */
export function Refused({ title, message }: { title: string; message: string }) {
  return (
    <Door rule="plain" title={title} lead={message}>
      <div className="grid gap-2">
        <ButtonLink kind="primary" wide to={href("/teams")}>
          Back to your teams
        </ButtonLink>
      </div>
    </Door>
  );
}

/** The server cannot be reached from this window. */
export function ServerAway({ busy }: { busy?: string }) {
  return (
    <Door
      rule="danger"
      title="The server does not answer"
      lead={busy ?? "Nothing that was acknowledged is lost."}
      foot="Running computations go back to the queue and start again by themselves."
    >
      <p className="text-ink-2">
        The connection may be down, or the server is being started again. What it had acknowledged is stored.
      </p>
      <TryNow />
    </Door>
  );
}

/** The server answered, and failed. The incident number finds the entry in its log. */
export function Fault({ incident }: { incident: string | null }) {
  return (
    <Door
      rule="danger"
      title="This page failed"
      lead="The fault is ours. Nothing that was acknowledged is lost."
      foot={
        incident ? (
          <>
            Incident {incident} ·{" "}
            <CopyButton as="link" text={incident}>
              copy
            </CopyButton>
          </>
        ) : (
          "The server's log holds what happened."
        )
      }
    >
      <p className="text-ink-2">
        Try once more; if it fails again, tell whoever runs this server
        {incident ? ", with the incident number below" : ""}.
      </p>
      <TryNow />
    </Door>
  );
}

function TryNow() {
  const location = useLocation();
  return (
    <div className="grid gap-2">
      <ButtonLink kind="primary" wide reloadDocument to={location}>
        Try now
      </ButtonLink>
      <Button wide onClick={() => history.back()}>
        Go back
      </Button>
    </div>
  );
}

interface Thrown {
  title?: string;
  message?: string;
  incident?: string;
}

/** True for what a browser throws when the line is down. */
function isConnectionLoss(error: unknown): boolean {
  return error instanceof TypeError && /fetch|network|load failed/i.test(error.message);
}

/**
 * The page for anything thrown: no access and no such address alike, refusals in the server's words, a lost
 * connection, a fault with its incident number.
 */
export function ErrorPage({ error, incident = null }: { error: unknown; incident?: string | null }) {
  const { user } = useShellData();
  if (!isRouteErrorResponse(error)) {
    return isConnectionLoss(error) ? <ServerAway /> : <Fault incident={incident} />;
  }
  const thrown: Thrown = typeof error.data === "object" && error.data !== null ? error.data : {};
  if (error.status === 404) return <NothingHere user={user} />;
  if (error.status === 503 || error.status === 502 || error.status === 504) {
    return <ServerAway busy={thrown.message} />;
  }
  if (error.status < 500) {
    const fallback = `The server refused this request (${error.status}).`;
    return <Refused title={thrown.title ?? "Not possible"} message={thrown.message ?? fallback} />;
  }
  return <Fault incident={thrown.incident ?? incident} />;
}
