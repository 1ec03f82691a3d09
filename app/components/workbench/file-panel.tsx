import { href } from "react-router";
import { CopyButton } from "~/components/ui/copy-button";
import { linkClass, TextLink, targetClass } from "~/components/ui/text-link";
import { formatBytes, formatChecksum, plural } from "~/lib/format";
import { useWorkbench } from "./workbench-context";

/** The source files with their checksums; the original bytes come back as they were. */
export function FilePanel() {
  const { ensemble } = useWorkbench();
  const guest = ensemble.role === "guest";
  return (
    <section className="mt-6">
      <h2 className="text-sm font-semibold">{ensemble.files.length === 1 ? "File" : "Files"}</h2>
      <ul className="mt-2">
        {ensemble.files.map((file) => (
          <li key={file.position} className="figures grid gap-1 border-t border-rule py-3 last:border-b">
            <p className="flex flex-wrap justify-between gap-x-3">
              <span className="min-w-0 font-medium break-all">{file.name}</span>
              <span className="text-ink-3">{formatBytes(file.bytes)}</span>
            </p>
            <p className="text-xs text-ink-3">
              {file.format.toUpperCase()}, {plural(file.frames, "frame")}
              {ensemble.files.length > 1 ? ` from ${file.firstFrame}` : ""}
              {file.batch > 1 ? `, batch ${file.batch}` : ""}
              {file.batchName ? ` “${file.batchName}”` : ""}
              {file.archive ? `, out of ${file.archive}` : ""}
            </p>
            <p className="flex flex-wrap items-center gap-x-4 gap-y-1 text-xs text-ink-3">
              <span title={file.sha256}>SHA-256 {formatChecksum(file.sha256)}</span>
              <CopyButton as="link" text={file.sha256}>
                Copy
              </CopyButton>
              {guest ? null : (
                <a
                  className={`${linkClass} ${targetClass} print:hidden`}
                  download
                  href={href("/files/ensembles/:id/sources/:position", {
                    id: ensemble.id,
                    position: String(file.position),
                  })}
                >
                  Download the original
                </a>
              )}
            </p>
          </li>
        ))}
      </ul>
      {ensemble.mayCompute ? (
        <p className="mt-3 text-xs text-ink-3 print:hidden">
          Another search of this molecule?{" "}
          <TextLink to={href("/ensembles/:id/intake", { id: ensemble.id })}>Add it at Intake</TextLink>.
          Another molecule?{" "}
          <TextLink to={`${href("/teams/:team", { team: ensemble.team.id })}?series=${ensemble.series.id}`}>
            Drop it on the series
          </TextLink>
          .
        </p>
      ) : null}
    </section>
  );
}
