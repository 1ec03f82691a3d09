import { href, Link } from "react-router";
import { formatCount } from "~/lib/format";
import { inPageWords } from "~/lib/workbench/page-words";
import { Badge } from "./badge";
import { ProgressBar } from "./progress-bar";
import { linkClass, TextButton } from "./text-link";
import { type Refusal, type Upload, uploadName, uploadWords } from "./upload-list";

interface Acts {
  onCancel: (id: number) => void;
  onAgain: (id: number) => void;
  onDismiss: (id: number) => void;
}

/** Uploads under way and over, each with its bar, result or refusal. */
export function UploadList({ uploads, ...acts }: Acts & { uploads: readonly Upload[] }) {
  if (uploads.length === 0) return null;
  const ended = uploads.filter(({ state }) => !["waiting", "sending", "reading"].includes(state));
  return (
    <div>
      <ul aria-label="Files being taken in" className="border-b border-rule">
        {uploads.map((upload) => (
          <UploadRow key={upload.id} upload={upload} {...acts} />
        ))}
      </ul>
      {ended.length > 2 ? (
        <p className="mt-2 text-right text-xs">
          <TextButton
            onClick={() => {
              for (const { id } of ended) acts.onDismiss(id);
            }}
          >
            Put all away
          </TextButton>
        </p>
      ) : null}
    </div>
  );
}

function UploadRow({ upload, onCancel, onAgain, onDismiss }: Acts & { upload: Upload }) {
  const { id, state, taken, refusal } = upload;
  const live = state === "waiting" || state === "sending" || state === "reading";
  const share = upload.bytes === 0 ? 1 : upload.sent / upload.bytes;
  return (
    <li className="figures grid gap-1 border-t border-rule py-3">
      <div className="flex items-baseline justify-between gap-3">
        <span className="min-w-0 truncate font-medium">{uploadName(upload)}</span>
        {live ? <span>{Math.floor(share * 100)} %</span> : <StateBadge state={state} />}
      </div>
      {live ? <ProgressBar share={share} label={`${uploadName(upload)}, sent`} /> : null}
      <div className="flex flex-wrap justify-between gap-x-3 gap-y-1 text-xs text-ink-3">
        <span role={live ? undefined : "status"} className="max-w-read min-w-0">
          {uploadWords(upload)}
        </span>
        <span className="flex gap-3">
          {live ? <TextButton onClick={() => onCancel(id)}>Cancel</TextButton> : null}
          {state === "failed" || state === "cancelled" ? (
            <TextButton onClick={() => onAgain(id)}>Try again</TextButton>
          ) : null}
          {taken ? (
            <EnsembleLink id={taken.id}>{taken.questions > 0 ? "Answer" : "Open"}</EnsembleLink>
          ) : null}
          {refusal?.existing ? <EnsembleLink id={refusal.existing}>Open what is here</EnsembleLink> : null}
          {live ? null : <TextButton onClick={() => onDismiss(id)}>Put away</TextButton>}
        </span>
      </div>
      {refusal ? <Faults refusal={refusal} /> : null}
    </li>
  );
}

function EnsembleLink({ id, children }: { id: string; children: string }) {
  return (
    <Link className={linkClass} to={href("/ensembles/:id/intake", { id })}>
      {children}
    </Link>
  );
}

function StateBadge({ state }: { state: Upload["state"] }) {
  if (state === "done") return <Badge tone="good">read</Badge>;
  if (state === "refused") return <Badge tone="danger">refused</Badge>;
  if (state === "failed") return <Badge tone="danger">not sent</Badge>;
  return <Badge>cancelled</Badge>;
}

const SHOWN_FAULTS = 5;

function Faults({ refusal }: { refusal: Refusal }) {
  // What the sentence above says already is not said again.
  const faults = refusal.faults.filter(({ message }) => !refusal.detail?.includes(message));
  if (faults.length === 0) return null;
  const more = faults.length - SHOWN_FAULTS;
  return (
    <ul className="grid gap-1 text-xs text-ink-2">
      {faults.slice(0, SHOWN_FAULTS).map((fault, i) => (
        <li key={i}>
          {faultPlace(fault)}
          {inPageWords(fault.message)}
        </li>
      ))}
      {more > 0 ? <li className="text-ink-3">{formatCount(more)} more of this kind</li> : null}
    </ul>
  );
}

/** File, line and frame, unless the message begins with them. */
function faultPlace(fault: Refusal["faults"][number]): string {
  if (fault.file && fault.message.startsWith(fault.file)) return "";
  const place = [
    fault.file,
    fault.line === undefined ? null : `line ${formatCount(fault.line)}`,
    fault.frame === undefined ? null : `frame ${formatCount(fault.frame)}`,
  ].filter((part) => part != null);
  return place.length > 0 ? `${place.join(", ")}: ` : "";
}
