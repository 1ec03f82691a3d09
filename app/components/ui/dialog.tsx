import { X } from "lucide-react";
import { Dialog as Radix } from "radix-ui";
import { type ReactNode, type RefObject, useRef } from "react";
import { IconButton } from "./button";

/**
 * One question, 560 px wide; below 640 px a sheet of full height. Escape and the scrim close it and the focus goes back.
 *
 * @param props.trigger the button that opens it; leave out where `open` is driven from outside
 */
export function Dialog({
  open,
  onOpenChange,
  trigger,
  returnTo,
  reading = false,
  title,
  description,
  children,
}: {
  open?: boolean;
  onOpenChange?: (open: boolean) => void;
  trigger?: ReactNode;
  /** Takes the focus afterwards, where what opened it is no trigger of its own: an entry of a menu. */
  returnTo?: RefObject<HTMLElement | null>;
  /** Something to read rather than a question: the focus begins at the cross, not at a switch below the text. */
  reading?: boolean;
  title: ReactNode;
  description?: ReactNode;
  children: ReactNode;
}) {
  const content = useRef<HTMLDivElement>(null);
  return (
    <Radix.Root open={open} onOpenChange={onOpenChange}>
      {trigger ? <Radix.Trigger asChild>{trigger}</Radix.Trigger> : null}
      <Radix.Portal>
        <Radix.Overlay className="fixed inset-0 z-40 bg-scrim" />
        <Radix.Content
          {...(description ? {} : { "aria-describedby": undefined })}
          ref={content}
          onOpenAutoFocus={(event) => {
            // The question's own field comes before the cross that stands above it.
            const field = reading
              ? null
              : content.current?.querySelector<HTMLElement>("input:not([type=hidden]), select, textarea");
            if (!field) return;
            event.preventDefault();
            field.focus();
          }}
          onCloseAutoFocus={(event) => {
            if (!returnTo?.current) return;
            event.preventDefault();
            returnTo.current.focus();
          }}
          className="fixed inset-0 z-50 grid content-start gap-4 overflow-y-auto border-rule-2 bg-sheet p-4 text-sm text-ink shadow-float sm:inset-auto sm:top-1/2 sm:left-1/2 sm:max-h-[calc(100dvh-4rem)] sm:w-140 sm:max-w-[calc(100vw-2rem)] sm:-translate-x-1/2 sm:-translate-y-1/2 sm:rounded-md sm:border sm:p-6"
        >
          <div className="flex items-center justify-between gap-3">
            <Radix.Title className="text-base font-semibold">{title}</Radix.Title>
            <Radix.Close asChild>
              <IconButton label="Close">
                <X aria-hidden="true" />
              </IconButton>
            </Radix.Close>
          </div>
          {description ? (
            <Radix.Description asChild>
              <div className="text-ink-2">{description}</div>
            </Radix.Description>
          ) : null}
          {children}
        </Radix.Content>
      </Radix.Portal>
    </Radix.Root>
  );
}

/** Closes the dialog around it. */
export const DialogClose = Radix.Close;

/** The buttons at the foot, the act first. */
export function DialogFoot({ children, note }: { children: ReactNode; note?: ReactNode }) {
  return (
    <div>
      <div className="flex flex-wrap items-center gap-3">{children}</div>
      {note ? <p className="mt-3 text-xs text-ink-3">{note}</p> : null}
    </div>
  );
}
