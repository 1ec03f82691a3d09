import { useFetcher } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { Note } from "~/components/ui/note";
import { TextButton } from "~/components/ui/text-link";
import type { ActAnswer } from "~/components/workbench/act-answer";
import { useWorkbench } from "~/components/workbench/workbench-context";

/** While the address holds a draft: that it is kept nowhere else, and the way to keep it with the ensemble. */
export function KeepMeasured({
  intent,
  record,
  emptied,
  anyKept,
  version,
  drop,
}: {
  intent: "measured" | "measured-properties";
  /** The draft, as it is kept. */
  record: object;
  /** True where the draft says nothing any more. */
  emptied: boolean;
  anyKept: boolean;
  version: number;
  /** Back to what is kept. */
  drop: () => void;
}) {
  const { ensemble } = useWorkbench();
  const fetcher = useFetcher<ActAnswer>();
  if (emptied && !anyKept) return null;
  return (
    <Note tone="mark">
      <fetcher.Form method="post" className="flex flex-wrap items-center gap-x-4 gap-y-2">
        <span className="basis-full">
          {emptied
            ? "The measured values are cleared here, and still kept with the ensemble. "
            : "These values stand in the address of this page and are not kept with the ensemble yet: other people, print-outs of theirs and editions do not have them. "}
          {ensemble.mayCompute ? null : "An analyst or owner of the team can keep them."}
        </span>
        {ensemble.mayCompute ? (
          <>
            <input type="hidden" name="intent" value={intent} />
            <input type="hidden" name="record" value={JSON.stringify(record)} />
            <input type="hidden" name="version" value={version} />
            <SubmitButton pending={fetcher.state !== "idle"} pendingLabel="Keeping…">
              {emptied ? "Take them away for everybody" : "Keep with the ensemble"}
            </SubmitButton>
          </>
        ) : null}
        <TextButton onClick={drop}>{anyKept ? "Back to what is kept" : "Drop them"}</TextButton>
        {fetcher.data && fetcher.data.ok !== true && fetcher.state === "idle" ? (
          <span role="alert" className="basis-full text-danger">
            {fetcher.data.message}
          </span>
        ) : null}
      </fetcher.Form>
    </Note>
  );
}
