import { Check } from "lucide-react";
import { href } from "react-router";
import { BlockHead } from "~/components/ui/finding";
import { linkClass } from "~/components/ui/text-link";
import { FILE_WORDS } from "~/lib/edition/edition-files";
import type { EditionRow } from "~/lib/edition/views";
import { formatBytes } from "~/lib/format";

/** Figures come together, as a zip. */
const notFigure = ({ name }: { name: string }) => !name.endsWith(".svg");

/** The files of the newest edition with size and checksum; a tick where the last recomputation gave the same bytes. */
export function EditionFilesBlock({ ensembleId, edition }: { ensembleId: string; edition: EditionRow }) {
  const number = String(edition.number);
  const to = (name: string) =>
    href("/files/ensembles/:id/editions/:number/files/:name", { id: ensembleId, number, name });
  return (
    <section className="min-w-0" aria-labelledby="edition-files-title">
      <BlockHead title={`Edition ${number}, files`} id="edition-files-title">
        <a className={`text-xs print:hidden ${linkClass}`} href={to("bundle.zip")} download>
          Bundle, zip
        </a>
      </BlockHead>
      <ul className="border-t border-rule">
        {edition.files.filter(notFigure).map(({ name, bytes, sha256 }) => (
          <li
            key={name}
            className="figures grid grid-cols-[minmax(0,1fr)_4.5rem_1rem] items-center gap-x-3 border-b border-rule py-2 sm:grid-cols-[minmax(0,1fr)_4.5rem_9rem_1rem]"
          >
            <span className="min-w-0">
              <a className={`${linkClass} print:text-ink print:no-underline`} href={to(name)} download>
                {name}
              </a>
              <span className="block text-xs text-ink-3">{FILE_WORDS[name]?.title ?? ""}</span>
            </span>
            <span className="text-right text-ink-2">{formatBytes(bytes)}</span>
            <span className="text-xs text-ink-3 max-sm:hidden" title={sha256}>
              SHA-256 {sha256.slice(0, 8)} …
            </span>
            {edition.verified?.same ? (
              <Check className="size-4 text-good" role="img" aria-label="the same bytes when recomputed" />
            ) : (
              <span />
            )}
          </li>
        ))}
      </ul>
      <p className="mt-2 text-xs text-ink-3">
        For the next program also: one XYZ file a conformer, with charge and multiplicity.{" "}
        <a className={`print:hidden ${linkClass}`} href={to("conformers.zip")} download>
          zip
        </a>
        . All figures:{" "}
        <a className={`print:hidden ${linkClass}`} href={to("figures.zip")} download>
          SVG, zip
        </a>
        ; with PNG on the edition's page.
      </p>
    </section>
  );
}
