import { formatBytes, formatCount, formatSeconds, plural, withUnit } from "../../lib/format.ts";
import { inPageWords } from "../../lib/workbench/page-words.ts";

/** What became of one upload. The clock comes in with the actions. */
export type UploadState = "waiting" | "sending" | "reading" | "done" | "refused" | "failed" | "cancelled";

/** Why a file was refused, in the server's words. */
export interface Refusal {
  title: string;
  detail: string | null;
  /** Places at fault: file, frame, line, and what would be right. */
  faults: readonly { file?: string; frame?: number; line?: number; message: string }[];
  /** The ensemble that these bytes already made, where that is the reason. */
  existing: string | null;
}

/** What intake said, as far as the row shows it. */
export interface Taken {
  id: string;
  name: string;
  frames: number;
  accepted: number;
  remarked: number;
  held: number;
  questions: number;
  /** True where the same bytes were here before. */
  already: boolean;
}

export interface Upload {
  id: number;
  /** Names of the files that go in together. */
  names: readonly string[];
  bytes: number;
  sent: number;
  /** Frames read so far; null before the first answer. */
  frames: number | null;
  state: UploadState;
  /** ms, when the first byte left. */
  startedAt: number | null;
  /** ms, when `sent` last grew. */
  now: number | null;
  taken: Taken | null;
  refusal: Refusal | null;
}

export type UploadAction =
  | { type: "add"; id: number; names: readonly string[]; bytes: number }
  | { type: "start"; id: number; now: number }
  | { type: "progress"; id: number; sent: number; now: number }
  | { type: "frames"; id: number; frames: number }
  | { type: "taken"; id: number; taken: Taken }
  | { type: "refused"; id: number; refusal: Refusal }
  | { type: "failed"; id: number }
  | { type: "cancel"; id: number }
  | { type: "again"; id: number }
  | { type: "dismiss"; id: number };

/** Uploads under way or over, newest last. Actions on one that has ended, or is unknown, change nothing. */
export function uploadList(list: readonly Upload[], action: UploadAction): readonly Upload[] {
  switch (action.type) {
    case "add":
      return [...list, fresh(action.id, action.names, action.bytes)];
    case "start":
      return change(list, action.id, ["waiting"], {
        state: "sending",
        startedAt: action.now,
        now: action.now,
      });
    case "progress":
      return list.map((upload) =>
        upload.id === action.id ? advance(upload, action.sent, action.now) : upload,
      );
    case "frames":
      // Answers may overtake each other.
      return list.map((upload) =>
        upload.id === action.id && LIVE.includes(upload.state)
          ? { ...upload, frames: Math.max(action.frames, upload.frames ?? 0) }
          : upload,
      );
    case "taken":
      return change(list, action.id, LIVE, { state: "done", taken: action.taken });
    case "refused":
      return change(list, action.id, LIVE, { state: "refused", refusal: action.refusal });
    case "failed":
      return change(list, action.id, LIVE, { state: "failed" });
    case "cancel":
      return change(list, action.id, LIVE, { state: "cancelled" });
    case "again":
      return list.map((upload) =>
        upload.id === action.id && (upload.state === "failed" || upload.state === "cancelled")
          ? fresh(upload.id, upload.names, upload.bytes)
          : upload,
      );
    case "dismiss":
      return list.filter((upload) => upload.id !== action.id || LIVE.includes(upload.state));
  }
}

const LIVE: readonly UploadState[] = ["waiting", "sending", "reading"];

function fresh(id: number, names: readonly string[], bytes: number): Upload {
  return {
    id,
    names,
    bytes,
    sent: 0,
    frames: null,
    state: "waiting",
    startedAt: null,
    now: null,
    taken: null,
    refusal: null,
  };
}

function change(
  list: readonly Upload[],
  id: number,
  from: readonly UploadState[],
  to: Partial<Upload>,
): readonly Upload[] {
  return list.map((upload) =>
    upload.id === id && from.includes(upload.state) ? { ...upload, ...to } : upload,
  );
}

function advance(upload: Upload, sent: number, now: number): Upload {
  if (upload.state !== "sending" && upload.state !== "reading") return upload;
  // The browser counts the frame of the form too; the file itself is what people know.
  const counted = Math.min(Math.max(sent, upload.sent), upload.bytes);
  return { ...upload, sent: counted, now, state: counted === upload.bytes ? "reading" : "sending" };
}

/** True while leaving the page would lose something. */
export function isUnderWay(list: readonly Upload[]): boolean {
  return list.some((upload) => LIVE.includes(upload.state));
}

/** The next to start, with at most `atOnce` on the line. */
export function nextToStart(list: readonly Upload[], atOnce: number): Upload | null {
  const busy = list.filter((upload) => upload.state === "sending" || upload.state === "reading").length;
  return busy < atOnce ? (list.find((upload) => upload.state === "waiting") ?? null) : null;
}

/** "tosylamide.xyz", or "a.xyz and 2 more". */
export function uploadName({ names }: Pick<Upload, "names">): string {
  const [first = "file"] = names;
  return names.length > 1 ? `${first} and ${names.length - 1} more` : first;
}

/**
 * What the row says below the bar.
 *
 * @example // 14 MB of 23 MB, about 9 s left
 */
export function uploadWords(upload: Upload): string {
  switch (upload.state) {
    case "waiting":
      return `${formatBytes(upload.bytes)}, waits for the one before`;
    case "sending": {
      const left = secondsLeft(upload);
      const amount = `${formatBytes(upload.sent)} of ${formatBytes(upload.bytes)}${framesWords(upload)}`;
      return left === null ? amount : `${amount}, about ${spanLeft(left)} left`;
    }
    case "reading":
      return `${formatBytes(upload.bytes)} sent; every frame is being read${framesWords(upload)}`;
    case "done":
      return upload.taken ? takenWords(upload.taken) : "Read";
    case "cancelled":
      // Once every byte has left, the server may have been quicker than the hand.
      return upload.sent < upload.bytes
        ? "Cancelled. Nothing was kept."
        : "Cancelled while it was being read. If reading had ended, the ensemble stands in the table.";
    case "failed":
      return "The connection was lost. Nothing was kept; the file can be sent again.";
    case "refused":
      return inPageWords(upload.refusal?.detail ?? "Nothing was kept.");
  }
}

/** ", 4,312 frames read so far" */
function framesWords({ frames }: Upload): string {
  return frames ? `, ${plural(frames, "frame")} read so far` : "";
}

function takenWords(taken: Taken): string {
  if (taken.already) return `Already here as ${taken.name}: the same bytes make no second ensemble.`;
  // Until the answer every frame that waits for it counts as held; that is no news yet.
  if (taken.questions > 0) {
    return `${plural(taken.frames, "frame")} read. ${plural(taken.questions, "question")} first; nothing is computed before.`;
  }
  const parts = [`${plural(taken.frames, "frame")} read`];
  if (taken.remarked > 0) parts.push(`${plural(taken.remarked, "remark")}`);
  if (taken.held > 0) parts.push(`${formatCount(taken.held)} held`);
  return `${parts.join(", ")}.`;
}

function spanLeft(seconds: number): string {
  return seconds < 90 ? withUnit(String(Math.max(1, Math.round(seconds))), "s") : formatSeconds(seconds);
}

/** Seconds until the last byte leaves, from the mean rate so far; null in the first half second. */
export function secondsLeft({ bytes, sent, startedAt, now }: Upload): number | null {
  if (startedAt === null || now === null || sent === 0 || now - startedAt < 500) return null;
  return ((bytes - sent) * (now - startedAt)) / sent / 1000;
}
