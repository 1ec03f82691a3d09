import { useEffect, useState } from "react";
import { useFetcher } from "react-router";
import { Button, SubmitButton } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { BlockHead } from "~/components/ui/finding";
import { StatePanel } from "~/components/ui/state-panel";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import type { HandOverView, LinkRow } from "~/lib/edition/views";
import { formatDateShort, formatMoment, plural } from "~/lib/format";
import type { HandOverAnswer } from "./answer";
import { LinkDialog } from "./link-dialog";

const DAY_MS = 86_400_000;

/** Links, live and ended; there is no address to copy, since none is kept. */
export function LinksBlock({ view }: { view: HandOverView }) {
  const { links, editions, linkDays, mayShare, now } = view;
  return (
    <section className="mt-8" aria-labelledby="links-title">
      <BlockHead title="Links" id="links-title">
        {mayShare && editions.length > 0 ? <LinkDialog editions={editions} linkDays={linkDays} /> : null}
      </BlockHead>
      {links.length === 0 ? (
        <StatePanel title="No links yet">
          {editions.length === 0
            ? "A link shows one edition to somebody without an account. Freeze the first edition, then make one."
            : "A link shows one edition to somebody without an account, until the day that you set."}
        </StatePanel>
      ) : (
        <>
          <Table aria-labelledby="links-title">
            <thead>
              <tr>
                <Th>For whom</Th>
                <Th className="max-sm:hidden">Shows</Th>
                <Th className="max-xl:hidden">Made</Th>
                <Th>Ends</Th>
                <Th align="right" unit="last" className="max-sm:hidden">
                  Opened
                </Th>
                <Th className="max-xl:hidden">Source files</Th>
                <Th>
                  <span className="sr-only">End</span>
                </Th>
              </tr>
            </thead>
            <tbody>
              {links.map((link) => (
                <Row key={link.id} link={link} now={now} mayShare={mayShare} />
              ))}
            </tbody>
          </Table>
          <p className="mt-2 text-xs text-ink-3">
            Whoever has a link sees that one edition, without an account. Addresses are shown once, when made,
            and are not kept readable.
          </p>
        </>
      )}
    </section>
  );
}

function Row({ link, now, mayShare }: { link: LinkRow; now: string; mayShare: boolean }) {
  const live = link.state === "live";
  const days = Math.ceil((Date.parse(link.endsAt) - Date.parse(now)) / DAY_MS);
  return (
    <Tr className={`figures ${live ? "" : "text-ink-3"}`}>
      <Td wrap className={live ? "font-medium" : ""}>
        {link.label}
        <span className="block text-xs font-normal text-ink-3 sm:hidden">edition {link.edition}</span>
      </Td>
      <Td className="max-sm:hidden">edition {link.edition}</Td>
      <Td className="max-xl:hidden">{formatDateShort(link.createdAt)}</Td>
      <Td>
        {formatDateShort(link.endsAt)}
        <span className="block text-xs text-ink-3">
          {live ? (days <= 1 ? "within a day" : `in ${days} days`) : link.state}
        </span>
      </Td>
      <Td align="right" className="max-sm:hidden">
        {link.opened === 0 ? "never" : plural(link.opened, "time")}
        {link.openedAt ? (
          <span className="block text-xs text-ink-3">{formatMoment(link.openedAt, now)}</span>
        ) : null}
      </Td>
      <Td className="max-xl:hidden">{link.sources ? "yes" : "no"}</Td>
      <Td align="right">{mayShare ? <EndNow link={link} live={live} /> : null}</Td>
    </Tr>
  );
}

/** Asks first: an ended link cannot be opened again, and its address cannot be given back. */
function EndNow({ link, live }: { link: LinkRow; live: boolean }) {
  const [open, setOpen] = useState(false);
  const fetcher = useFetcher<HandOverAnswer>();
  const { state, data } = fetcher;
  useEffect(() => {
    if (state !== "idle" || !data) return;
    if (data.message) showToast({ tone: "failed", text: data.message });
    else showToast({ tone: "done", text: `The link for ${link.label} has ended.` });
  }, [state, data, link.label]);
  // The row stays once its link has ended, so that the answer still finds somebody to say it.
  if (!live) return null;
  return (
    <Dialog
      open={open}
      onOpenChange={setOpen}
      trigger={<TextButton aria-label={`End now the link for ${link.label}`}>End now…</TextButton>}
      title={`End the link for ${link.label}`}
      description={`Whoever opens it reads from now on that it has ended. It cannot be opened again; a new link to edition ${link.edition} can be made.`}
    >
      <fetcher.Form method="post">
        <input type="hidden" name="intent" value="end-link" />
        <input type="hidden" name="link" value={link.id} />
        <DialogFoot>
          <SubmitButton kind="stop" pending={state !== "idle"} pendingLabel="Ending">
            End link
          </SubmitButton>
          <Button kind="quiet" onClick={() => setOpen(false)}>
            Keep it
          </Button>
        </DialogFoot>
      </fetcher.Form>
    </Dialog>
  );
}
