import { useState } from "react";
import { Button } from "~/components/ui/button";
import { Dialog, DialogFoot } from "~/components/ui/dialog";
import { Segments } from "~/components/ui/segments";
import { formatBytes, plural } from "~/lib/format";

/** Several files at once: one ensemble each, or all into one. Nothing is sent before it is answered. */
export function AskSeveral({
  files,
  onAnswer,
  onCancel,
}: {
  files: readonly File[] | null;
  onAnswer: (together: boolean) => void;
  onCancel: () => void;
}) {
  const [how, setHow] = useState<"each" | "one">("each");
  const count = files?.length ?? 0;
  const words =
    how === "each" ? `Take in ${count} ensembles` : `Take in one ensemble of ${plural(count, "file")}`;
  return (
    <Dialog
      open={files !== null}
      onOpenChange={(open) => !open && onCancel()}
      title={`Take in ${count} files`}
    >
      <ul className="figures max-h-64 overflow-y-auto border-y border-rule">
        {files?.map((file, i) => (
          <li key={i} className="flex justify-between gap-4 border-t border-rule py-2 first:border-t-0">
            <span className="min-w-0 truncate">{file.name}</span>
            <span className="shrink-0 text-ink-3">{formatBytes(file.size)}</span>
          </li>
        ))}
      </ul>
      <Segments
        label="What they make"
        value={how}
        onChange={setHow}
        options={[
          { value: "each", label: "One ensemble a file" },
          { value: "one", label: "As one ensemble" },
        ]}
        help="As one: all files hold the same molecule; frames are numbered on from file to file."
      />
      <DialogFoot>
        <Button
          kind="primary"
          onClick={() => {
            onAnswer(how === "one");
            setHow("each");
          }}
        >
          {words}
        </Button>
        <Button kind="quiet" onClick={onCancel}>
          Cancel
        </Button>
      </DialogFoot>
    </Dialog>
  );
}
