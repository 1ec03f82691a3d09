import { href } from "react-router";
import { Door } from "~/components/layout/door";
import { Facts } from "~/components/ui/facts";
import { TextLink } from "~/components/ui/text-link";
import { formatDateTime } from "~/lib/format";

/** For whoever holds the secret of a link that has ended: when it ended, and whom to ask. */
export function EndedLink({ endedAt, contact }: { endedAt: string; contact: string }) {
  return (
    <Door
      rule="held"
      title="This link has ended"
      lead={`It showed one edition of a conformer ensemble until ${formatDateTime(endedAt)}.`}
      foot="What you printed or downloaded stays valid: its checksums do not change."
    >
      <p className="text-ink-2">
        The edition is kept; only the way to it has closed. Ask the person who sent you the link for a new
        one.
      </p>
      <Facts
        ruled
        facts={[{ label: "Whom to ask", value: contact === "" ? "whoever sent you the link" : contact }]}
      />
      <p className="text-ink-2">
        <TextLink to={href("/login")}>Sign in</TextLink> if you belong to the team.
      </p>
    </Door>
  );
}
