import { Upload } from "lucide-react";
import { type ReactNode, useEffect, useId, useRef, useState } from "react";
import { plural } from "~/lib/format";
import { type ButtonKind, buttonClass } from "./button";
import { linkClass } from "./text-link";

/** What the file dialog offers first; content decides in the end, so that any name may be chosen. */
const ACCEPT = ".xyz,.extxyz,.sdf,.sd,.mol,.gz,.zip,.txt";

function filesOf(data: DataTransfer | null): File[] {
  return data ? Array.from(data.files) : [];
}

/** True where a paste belongs to what the person is typing in. */
function isTyping(target: EventTarget | null): boolean {
  return target instanceof Element && target.closest("input, textarea, select, [contenteditable]") !== null;
}

/**
 * Files let go or pasted anywhere on the page. Pasted text becomes a file of its own.
 *
 * @param disabled leaves the browser's own behaviour alone
 * @returns how many files hover over the page, or null
 */
export function usePageDrop(onFiles: (files: File[]) => void, disabled = false): number | null {
  const [over, setOver] = useState<number | null>(null);
  const tell = useRef(onFiles);
  useEffect(() => {
    tell.current = onFiles;
  });

  useEffect(() => {
    if (disabled) return;
    // dragenter and dragleave come in pairs for every element passed: only their sum says where the pointer is.
    let depth = 0;
    const carriesFiles = (event: DragEvent) => event.dataTransfer?.types.includes("Files") ?? false;
    const enter = (event: DragEvent) => {
      if (!carriesFiles(event)) return;
      event.preventDefault();
      depth++;
      setOver(event.dataTransfer?.items.length || 1);
    };
    const leave = (event: DragEvent) => {
      if (carriesFiles(event) && --depth <= 0) setOver(null);
    };
    const hover = (event: DragEvent) => {
      if (carriesFiles(event)) event.preventDefault();
    };
    const drop = (event: DragEvent) => {
      if (!carriesFiles(event)) return;
      event.preventDefault();
      depth = 0;
      setOver(null);
      const files = filesOf(event.dataTransfer);
      if (files.length > 0) tell.current(files);
    };
    const paste = (event: ClipboardEvent) => {
      if (isTyping(event.target)) return;
      const files = filesOf(event.clipboardData);
      const text = event.clipboardData?.getData("text/plain") ?? "";
      if (files.length === 0 && text.trim().includes("\n")) files.push(new File([text], "pasted.xyz"));
      if (files.length === 0) return;
      event.preventDefault();
      tell.current(files);
    };
    window.addEventListener("dragenter", enter);
    window.addEventListener("dragleave", leave);
    window.addEventListener("dragover", hover);
    window.addEventListener("drop", drop);
    window.addEventListener("paste", paste);
    return () => {
      window.removeEventListener("dragenter", enter);
      window.removeEventListener("dragleave", leave);
      window.removeEventListener("dragover", hover);
      window.removeEventListener("drop", drop);
      window.removeEventListener("paste", paste);
    };
  }, [disabled]);
  return over;
}

/** Over the whole page while files hover: what letting go will do. */
export function DropOverlay({ over, where }: { over: number | null; where: ReactNode }) {
  if (over === null) return null;
  return (
    <div className="pointer-events-none fixed inset-0 z-40 grid place-items-center bg-scrim p-4">
      <div className="grid justify-items-center gap-1 rounded-md border-2 border-mark bg-mark-wash px-12 py-8 text-center text-ink">
        <Upload aria-hidden="true" className="size-4" />
        <p className="font-semibold">Let go to read {plural(over, "file")}</p>
        <p className="text-xs">{where}</p>
      </div>
    </div>
  );
}

interface ChooserProps {
  onFiles: (files: File[]) => void;
  /** What the file dialog offers first. */
  accept?: string;
  disabled?: boolean;
}

/** The file dialog behind a button; keys and screen readers reach the native control. */
export function FileButton({
  onFiles,
  disabled,
  kind = "primary",
  children,
}: ChooserProps & { kind?: ButtonKind; children: ReactNode }) {
  const id = useId();
  return (
    <label
      htmlFor={id}
      className={`relative noscript:hidden ${buttonClass({ kind })} has-[:focus-visible]:outline-2 has-[:focus-visible]:outline-offset-2 has-[:focus-visible]:outline-mark`}
    >
      <Upload aria-hidden="true" />
      {children}
      <HiddenInput id={id} onFiles={onFiles} disabled={disabled} />
    </label>
  );
}

function HiddenInput({ id, onFiles, accept = ACCEPT, disabled }: ChooserProps & { id: string }) {
  return (
    <input
      id={id}
      type="file"
      multiple
      accept={accept}
      disabled={disabled}
      className="absolute inset-0 size-full cursor-pointer opacity-0 file:hidden"
      onChange={(event) => {
        const files = Array.from(event.currentTarget.files ?? []);
        // Choosing the same file twice must count twice.
        event.currentTarget.value = "";
        if (files.length > 0) onFiles(files);
      }}
    />
  );
}

/** The dashed field: dropping (the whole page takes files), choosing, pasting. */
export function Dropzone({ onFiles, accept, disabled, hint }: ChooserProps & { hint: ReactNode }) {
  const id = useId();
  return (
    <div className="grid place-content-center justify-items-center gap-1 noscript:hidden print:hidden rounded-md border-[1.5px] border-dashed border-edge px-4 py-6 text-center text-ink-2">
      <Upload aria-hidden="true" className="size-4" />
      <p>
        <span className="font-semibold text-ink">Drop files here</span>,{" "}
        <label
          htmlFor={id}
          className={`relative ${linkClass} has-[:focus-visible]:outline-2 has-[:focus-visible]:outline-offset-2 has-[:focus-visible]:outline-mark`}
        >
          choose them
          <HiddenInput id={id} onFiles={onFiles} accept={accept} disabled={disabled} />
        </label>
        <span className="pointer-coarse:hidden">
          , or paste their text: Ctrl+V or Cmd+V anywhere on this page
        </span>
      </p>
      <p className="text-xs text-ink-3">{hint}</p>
    </div>
  );
}
