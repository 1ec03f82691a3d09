import { Form } from "react-router";
import { ButtonLink, SubmitButton } from "~/components/ui/button";
import { Note } from "~/components/ui/note";
import { Door } from "./door";

/**
 * The door behind a link in a letter: one act, done by its button, since mail programs open links before people do;
 * once the link has ended, why, and the way on.
 */
export function LetterDoor({
  open,
  title,
  lead,
  act,
  refused,
  ended,
}: {
  open: boolean;
  title: string;
  lead: string;
  /** Label of the button. */
  act: string;
  /** Why the act was refused a moment ago. */
  refused?: string;
  ended: { lead: string; to: string; label: string };
}) {
  if (!open) {
    return (
      <Door rule="held" title="This link has ended" lead={ended.lead}>
        <ButtonLink kind="primary" wide to={ended.to}>
          {ended.label}
        </ButtonLink>
      </Door>
    );
  }
  return (
    <Door title={title} lead={lead}>
      {refused === undefined ? null : (
        <div role="alert">
          <Note tone="danger">{refused}</Note>
        </div>
      )}
      <Form method="post">
        <SubmitButton wide>{act}</SubmitButton>
      </Form>
    </Door>
  );
}
