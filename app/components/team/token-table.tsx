import { useEffect, useState } from "react";
import { href, useFetcher } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import { formatDateShort, formatMoment } from "~/lib/format";
import type { TokenRow } from "~/services/tokens/list-tokens.server";
import type { ActAnswer } from "./ensemble-acts";

export const SCOPE_WORDS: Record<TokenRow["scope"], string> = {
  full: "all that its person may",
  read: "read only",
  add: "add files only",
};

/** Tokens that were not revoked; ended ones stay, in a quieter ink. */
export function TokenTable({
  tokens,
  team,
  now,
}: {
  tokens: readonly TokenRow[];
  team: string;
  now: string;
}) {
  return (
    <Table aria-label="Tokens">
      <thead>
        <tr>
          <Th>Token</Th>
          <Th className="max-sm:hidden">Acts as</Th>
          <Th className="max-sm:hidden">May</Th>
          <Th className="max-xl:hidden">Made</Th>
          <Th className="max-sm:hidden">Last used</Th>
          <Th>Ends</Th>
          <Th>
            <span className="sr-only">Revoke</span>
          </Th>
        </tr>
      </thead>
      <tbody>
        {tokens.map((token) => (
          <Tr key={token.id} className={token.ended ? "text-ink-3" : ""}>
            <Td tall wrap>
              <span className={token.ended ? "" : "font-semibold"}>{token.name}</span>
              <span className="block text-xs text-ink-3">
                {token.prefix}…<span className="sm:hidden"> · {SCOPE_WORDS[token.scope]}</span>
              </span>
            </Td>
            <Td tall className="max-sm:hidden">
              {token.own ? `${token.owner}, you` : token.owner}
            </Td>
            <Td tall className="max-sm:hidden">
              {SCOPE_WORDS[token.scope]}
            </Td>
            <Td tall className="max-xl:hidden">
              {formatDateShort(token.createdAt)}
            </Td>
            <Td tall className="max-sm:hidden">
              {token.usedAt ? formatMoment(token.usedAt, now) : "never"}
            </Td>
            <Td tall>{endWords(token)}</Td>
            <Td tall align="right">
              <Revoke token={token} team={team} />
            </Td>
          </Tr>
        ))}
      </tbody>
    </Table>
  );
}

function endWords(token: TokenRow): string {
  if (token.endsAt === null) return "no end";
  return token.ended ? `ended ${formatDateShort(token.endsAt)}` : formatDateShort(token.endsAt);
}

/** Asks first: whatever uses the token stops working at once, and it cannot be brought back. */
function Revoke({ token, team }: { token: TokenRow; team: string }) {
  const [open, setOpen] = useState(false);
  const fetcher = useFetcher<ActAnswer>();
  const { state, data } = fetcher;
  useEffect(() => {
    if (state === "idle" && data?.message) showToast({ tone: "failed", text: data.message });
  }, [state, data]);
  return (
    <Dialog
      open={open}
      onOpenChange={setOpen}
      trigger={<TextButton aria-label={`Revoke ${token.name}`}>Revoke…</TextButton>}
      title={`Revoke ${token.name}`}
      description={`Whatever sends ${token.prefix}… is refused from now on. A revoked token cannot be brought back; a new one can be made.`}
    >
      <fetcher.Form method="post" action={href("/teams/:team/tokens", { team })}>
        <input type="hidden" name="intent" value="revoke" />
        <input type="hidden" name="token" value={token.id} />
        <DialogFoot>
          <SubmitButton kind="stop" pending={state !== "idle"} pendingLabel="Revoking">
            Revoke token
          </SubmitButton>
          <Button kind="quiet" onClick={() => setOpen(false)}>
            Keep it
          </Button>
        </DialogFoot>
      </fetcher.Form>
    </Dialog>
  );
}
