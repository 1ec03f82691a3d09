import { Form } from "react-router";
import { Badge } from "~/components/ui/badge";
import { SubmitButton } from "~/components/ui/button";
import type { EditionRow, VerifyingView } from "~/lib/edition/views";
import { formatChecksum, formatDateTime, formatSeconds } from "~/lib/format";

/** How far a recomputation is; the page looks again by itself until it ends. */
function Busy({ number, verifying }: { number: number; verifying: VerifyingView }) {
  const share = Math.round(100 * verifying.progress);
  return (
    <div className="min-w-0 flex-1 max-sm:basis-full" role="status">
      <p>
        {verifying.state === "queued"
          ? `Edition ${number} waits to be recomputed.`
          : `Edition ${number} is being recomputed: original files, sift, draws, then every file.`}
      </p>
      <progress
        className="mt-2 h-1 w-full accent-mark"
        max={100}
        value={share}
        aria-label={`Recomputing edition ${number}`}
      />
    </div>
  );
}

/** How the last recomputation of an edition came out, and the button that runs one. */
export function VerifyStrip({ edition, mayShare }: { edition: EditionRow; mayShare: boolean }) {
  const { verified, verifying } = edition;
  const busy = verifying?.state === "queued" || verifying?.state === "running";
  const tone =
    verified === null ? "border-rule-2" : verified.same ? "border-good-edge" : "border-danger-edge";
  return (
    <section className={`mt-6 border-t-3 ${tone} border-b border-b-rule py-3`} aria-label="Verification">
      <div className="flex flex-wrap items-center gap-x-4 gap-y-3">
        {busy ? (
          <Busy number={edition.number} verifying={verifying} />
        ) : verifying?.state === "failed" ? (
          <p className="min-w-0 flex-1 text-danger max-sm:basis-full" role="alert">
            Edition {edition.number} could not be recomputed. {verifying.error}
          </p>
        ) : verified === null ? (
          <p className="min-w-0 flex-1 text-ink-2 max-sm:basis-full">
            Edition {edition.number} has not been recomputed yet. It takes the stored bytes, runs the recipe
            again and compares every file.
          </p>
        ) : (
          <>
            <Badge tone={verified.same ? "good" : "danger"}>
              {verified.same ? "the same bytes" : "it differs"}
            </Badge>
            <div className="figures min-w-0 flex-1 max-sm:basis-full">
              <p className="font-medium">
                {verified.same
                  ? `Edition ${edition.number} was recomputed from its source bytes in ${formatSeconds(verified.seconds)}: ${verified.agree} of ${verified.files} files agree, byte for byte.`
                  : `Edition ${edition.number} was recomputed: ${verified.agree} of ${verified.files} files agree.`}
              </p>
              <p className="text-ink-2">
                {formatDateTime(verified.at)}, Lowlying {verified.version}
                {verified.version === edition.version
                  ? ", the version that froze it"
                  : `; ${edition.version} froze it`}
                .
              </p>
            </div>
          </>
        )}
        {mayShare ? (
          <Form method="post" preventScrollReset>
            <input type="hidden" name="intent" value="verify" />
            <input type="hidden" name="number" value={edition.number} />
            <SubmitButton kind="plain" pending={busy || undefined} pendingLabel="Recomputing">
              Recompute and verify
            </SubmitButton>
          </Form>
        ) : null}
      </div>
      {verified !== null && !busy && verified.inputs.length > 0 ? (
        <ul className="figures mt-3 grid gap-1 text-xs text-ink-2" aria-label="What is not what it was">
          {verified.inputs.map(({ name, note }) => (
            <li key={name} className="border-l-3 border-held-edge pl-3">
              <span className="font-medium text-ink">{name}</span>: {note}
            </li>
          ))}
        </ul>
      ) : null}
      {verified !== null && !busy && !verified.same ? (
        <ul className="figures mt-3 grid gap-1 text-xs text-ink-2">
          {verified.differing.map(({ name, was, is }) => (
            <li key={name}>
              <span className="font-medium text-ink">{name}</span>: {formatChecksum(was)} then,{" "}
              {is === null ? "not to be made from what is stored now" : `${formatChecksum(is)} now`}
            </li>
          ))}
        </ul>
      ) : null}
    </section>
  );
}
