import { type FocusEvent, type ReactNode, type RefObject, useRef, useState } from "react";
import { href } from "react-router";
import { Badge } from "~/components/ui/badge";
import { WithFormulas } from "~/components/ui/formula";
import { TextButton, TextLink } from "~/components/ui/text-link";
import { useFocusRefuge } from "~/hooks/use-focus-refuge";
import { formatCount, plural } from "~/lib/format";
import { whyNotReleased } from "~/lib/intake/release";
import type { IntakeMessage } from "~/lib/intake/report";
import { canBeSplitOff } from "~/lib/intake/split-name";
import type { FileView, FrameView, IntakeView } from "~/lib/views";
import { type FrameGroup, framesWords, groupFrames, reasonWords } from "~/lib/workbench/intake-lists";
import { inPageWords } from "~/lib/workbench/page-words";
import { HoldFrame, ReleaseFrame } from "./decide-frame";
import { SplitOff } from "./split-off";
import { useWorkbench } from "./workbench-context";

const FIRST_GROUPS = 10;

/** What is held, why, where, and what can be done about it. */
export function HeldList({ intake }: { intake: Pick<IntakeView, "held" | "waiting" | "became"> }) {
  const { held: frames, waiting, became } = intake;
  const { ensemble } = useWorkbench();
  const refuge = useRef<HTMLHeadingElement>(null);
  const onFocus = useFocusRefuge(() => refuge.current);
  const held = ensemble.held - waiting;
  const waits = (frame: FrameView) => frame.holdReason === "waits-for-answer" && ensemble.openQuestions > 0;
  // What a person can look into comes before the crowd that only waits.
  const ordered = [...frames.filter((frame) => !waits(frame)), ...frames.filter(waits)];
  return (
    <FrameList
      title={held === 0 && waiting > 0 ? "Waiting for an answer" : "Held"}
      heading={refuge}
      onFocus={onFocus}
      badge={
        <>
          {held > 0 || waiting === 0 ? (
            <Badge tone={held > 0 ? "held" : "plain"}>{formatCount(held)}</Badge>
          ) : null}
          {waiting > 0 ? (
            <Badge tone="ask">{held > 0 ? `${formatCount(waiting)} wait` : formatCount(waiting)}</Badge>
          ) : null}
        </>
      }
      lead={heldLead(frames, held, waiting)}
      edge="border-held-edge"
      frames={ordered}
      total={ensemble.held}
      tool={
        ensemble.mayCompute && ensemble.openQuestions === 0 ? (
          <HoldFrame ensembleId={ensemble.id} frames={ensemble.frames} />
        ) : null
      }
    >
      {(group) => <HeldEntry key={group.first.number} group={group} became={became} />}
    </FrameList>
  );
}

/** What being held means for those that are listed. */
function heldLead(frames: readonly FrameView[], held: number, waiting: number): string {
  if (held === 0 && waiting > 0) return "Kept; the answers above release them. Nothing else is held.";
  if (held === 0) return "No frame is held.";
  const kept = "Kept, and left out of every computation";
  const own = frames.filter(({ holdReason }) => holdReason !== "waits-for-answer");
  const free = own.filter(({ releasable }) => releasable).length;
  if (free === 0) return `${kept}. None of them can be released; each says why.`;
  return free === own.length
    ? `${kept} until somebody releases ${held === 1 ? "it" : "them"}.`
    : `${kept}. Some can be released, the others say why not.`;
}

/** Frames that were accepted with a remark; it travels with them. */
export function RemarkedList({ frames }: { frames: readonly FrameView[] }) {
  const { ensemble } = useWorkbench();
  return (
    <FrameList
      title="With a remark"
      badge={
        <Badge tone={ensemble.remarked > 0 ? "remark" : "plain"}>{formatCount(ensemble.remarked)}</Badge>
      }
      lead={
        ensemble.remarked === 0
          ? "No frame carries a remark."
          : "Accepted; the remark travels with the frame."
      }
      edge="border-remark-edge"
      frames={frames}
      total={ensemble.remarked}
    >
      {(group) => (
        <Entry key={group.first.number} group={group}>
          {group.first.note ? (
            <p>
              <WithFormulas>{group.first.note}</WithFormulas>
            </p>
          ) : null}
          <Acts group={group} />
        </Entry>
      )}
    </FrameList>
  );
}

function FrameList({
  title,
  badge,
  lead,
  edge,
  frames,
  total,
  tool,
  heading,
  onFocus,
  children,
}: {
  title: string;
  /** Takes the focus when an entry goes that had it. */
  heading?: RefObject<HTMLHeadingElement | null>;
  onFocus?: (event: FocusEvent) => void;
  badge: ReactNode;
  lead: string;
  edge: string;
  frames: readonly FrameView[];
  total: number;
  tool?: ReactNode;
  children: (group: FrameGroup) => ReactNode;
}) {
  const [all, setAll] = useState(false);
  const groups = groupFrames(frames);
  const shown = all ? groups : groups.slice(0, FIRST_GROUPS);
  return (
    // biome-ignore lint/a11y/noStaticElementInteractions: it watches where the focus of the controls inside is
    <section className="min-w-0" onFocus={onFocus}>
      <div className="flex min-h-7 flex-wrap items-center gap-3">
        <h3 ref={heading} tabIndex={heading ? -1 : undefined} className="text-sm font-semibold outline-none">
          {title}
        </h3>
        {badge}
        {tool ? <span className="ml-auto">{tool}</span> : null}
      </div>
      <p className="mt-1 text-xs text-ink-3">{lead}</p>
      {shown.length > 0 ? <ul className={`mt-2 border-t ${edge}`}>{shown.map(children)}</ul> : null}
      {groups.length > FIRST_GROUPS ? (
        <p className="mt-2 text-xs text-ink-3">
          {shown.length} of {formatCount(groups.length)} entries ·{" "}
          <TextButton onClick={() => setAll(!all)}>{all ? "show fewer" : "show all"}</TextButton>
        </p>
      ) : null}
      {frames.length < total ? (
        <p className="mt-2 text-xs text-ink-3">
          The first {formatCount(frames.length)} of {formatCount(total)} frames are listed; the strip above
          shows all.
        </p>
      ) : null}
    </section>
  );
}

function Entry({ group, children }: { group: FrameGroup; children: ReactNode }) {
  const { selected, ensemble } = useWorkbench();
  const { first, frames } = group;
  const onView = selected.length > 0 && frames.some((frame) => selected[0] === frame.number);
  const file = ensemble.files.length > 1 ? (ensemble.files[first.file]?.name ?? null) : null;
  return (
    <li
      className={`relative border-b border-rule py-3 ${onView ? "before:absolute before:inset-y-0 before:-left-3 before:w-[3px] before:bg-mark max-sm:before:-left-2" : ""}`}
    >
      <p className="figures mb-1 flex flex-wrap items-center gap-x-3 gap-y-1">
        <b className="font-semibold">{framesWords(frames.map((frame) => frame.number))}</b>
        {first.state === "held" ? <Badge tone="held">{reasonWords(first.holdReason)}</Badge> : null}
        {frames.length === 1 && first.label ? (
          <span className="truncate text-ink-3">{first.label}</span>
        ) : null}
        <span className="ml-auto text-xs text-ink-3">
          {file ? `${file}, ` : ""}
          {frames.length === 1 ? "" : "from "}line {formatCount(first.line)}
        </span>
      </p>
      {children}
    </li>
  );
}

function HeldEntry({ group, became }: { group: FrameGroup; became: IntakeView["became"] }) {
  const { ensemble } = useWorkbench();
  const { first, frames } = group;
  const waits = first.holdReason === "waits-for-answer";
  const why = whyNotReleased(first.holdReason, frames.length);
  const single = frames.length === 1;
  const child = became.find((one) => one.frames.includes(first.number));
  return (
    <Entry group={group}>
      {first.note ? (
        <p>
          <WithFormulas>{first.note}</WithFormulas>
        </p>
      ) : null}
      {waits && ensemble.openQuestions > 0 ? (
        <p className="text-ink-2">
          Released by the answer to the {ensemble.openQuestions === 1 ? "question" : "questions"} above.
        </p>
      ) : null}
      {why !== null ? (
        <p className="text-xs text-ink-3">
          {single ? "It" : `The ${plural(frames.length, "frame")}`} cannot be released: {why}
        </p>
      ) : null}
      <Acts group={group}>
        {single && first.releasable && ensemble.mayCompute && !(waits && ensemble.openQuestions > 0) ? (
          <ReleaseFrame ensembleId={ensemble.id} frame={first.number} note={first.note} />
        ) : null}
        {child ? (
          <span className="text-ink-2">
            Became{" "}
            <TextLink to={href("/ensembles/:id/intake", { id: child.ensembleId })}>{child.name}</TextLink>
          </span>
        ) : ensemble.mayCompute && canBeSplitOff(first.holdReason) ? (
          <SplitOff ensembleId={ensemble.id} frame={first.number} count={frames.length} />
        ) : null}
      </Acts>
    </Entry>
  );
}

function Acts({ group, children }: { group: FrameGroup; children?: ReactNode }) {
  const { selected, show } = useWorkbench();
  const frame = group.frames.find((one) => one.showable);
  const shown = frame !== undefined && selected.length === 1 && selected[0] === frame.number;
  if (frame === undefined && !children) return null;
  return (
    <div className="mt-1 flex flex-wrap items-center gap-x-4 gap-y-2 [&>button]:max-sm:py-2">
      {frame === undefined ? null : shown ? (
        <span className="text-ink-3">Shown in the view</span>
      ) : (
        <TextButton onClick={() => show([frame.number])}>
          Show<span className="sr-only"> frame {frame.number}</span>
        </TextButton>
      )}
      {children}
    </div>
  );
}

/** What intake said of files rather than of frames. */
export function FileMessages({
  messages,
  files,
}: {
  messages: readonly IntakeMessage[];
  files: readonly FileView[];
}) {
  const of = messages.filter((message) => message.frame === undefined && message.severity !== "question");
  if (of.length === 0) return null;
  return (
    <section className="mt-9">
      <h3 className="text-sm font-semibold">Of the {files.length === 1 ? "file" : "files"}</h3>
      <ul className="mt-2 border-t border-remark-edge">
        {of.map((message, k) => (
          <li key={k} className="border-b border-rule py-3">
            <p>
              {files.length > 1 ? `${message.file}: ` : ""}
              <WithFormulas>{inPageWords(message.message)}</WithFormulas>
              {message.found ? <span className="text-ink-3"> Found: “{message.found}”.</span> : null}
            </p>
            {message.hint || message.line ? (
              <p className="text-xs text-ink-3">
                {[message.line ? `Line ${formatCount(message.line)}.` : null, inPageWords(message.hint ?? "")]
                  .filter(Boolean)
                  .join(" ")}
              </p>
            ) : null}
          </li>
        ))}
      </ul>
    </section>
  );
}
