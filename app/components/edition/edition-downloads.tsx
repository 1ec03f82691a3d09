import { useState } from "react";
import { linkClass as onScreen, TextButton } from "~/components/ui/text-link";
import { FILE_WORDS } from "~/lib/edition/edition-files";
import type { EditionView } from "~/lib/edition/views";
import { formatBytes, formatChecksum } from "~/lib/format";
import type { EditionAddresses } from "./addresses";
import { EditionHead } from "./edition-head";
import { saveFigures } from "./save-figures";

/** Names of files; on paper they are words, not links. */
const linkClass = `${onScreen} print:text-ink print:no-underline`;

/** Files of an edition with their checksums, then the originals where they go along. */
export function EditionDownloads({
  edition,
  addresses,
}: {
  edition: EditionView;
  addresses: EditionAddresses;
}) {
  const packed = ["bundle.zip", "conformers.zip"];
  const figures = edition.files.filter(({ name }) => name.endsWith(".svg"));
  const others = edition.files.filter(({ name }) => !name.endsWith(".svg"));
  return (
    <section className="min-w-0" aria-labelledby="edition-files">
      <EditionHead id="edition-files">Files of this edition</EditionHead>
      <ul className="files mt-3 border-t border-rule">
        {others.map(({ name, bytes, sha256 }) => (
          <Line key={name} name={name} to={addresses.file(name)} bytes={bytes} sha256={sha256} />
        ))}
        {figures.length > 0 ? <Figures figures={figures} addresses={addresses} edition={edition} /> : null}
        {packed.map((name) => (
          <Line key={name} name={name} to={addresses.file(name)} bytes={null} sha256={null} />
        ))}
      </ul>
      {edition.sources.length > 0 ? (
        <>
          <h3 className="mt-5 text-sm font-semibold">Source files</h3>
          <ul className="mt-2 border-t border-rule">
            {edition.sources.map((file) => (
              <li
                key={file.position}
                className="keep figures grid grid-cols-[minmax(0,1fr)_auto] gap-x-4 border-b border-rule py-2"
              >
                <a
                  className={`[overflow-wrap:anywhere] ${linkClass}`}
                  href={addresses.source(file.position)}
                  download
                >
                  {file.name}
                </a>
                <span className="text-ink-2">{formatBytes(file.bytes)}</span>
                <span className="col-span-2 text-xs break-all text-ink-3">SHA-256 {file.sha256}</span>
              </li>
            ))}
          </ul>
        </>
      ) : null}
      <p className="figures mt-2 text-xs text-ink-3">
        {edition.sources.length === 0 ? "Source files are not part of this link. " : ""}
        Edition checksum: SHA-256{" "}
        <span title={edition.contentSha256}>{formatChecksum(edition.contentSha256)}</span>. Computed with
        Lowlying {edition.version}; the same recipe gives the same digits.
      </p>
    </section>
  );
}

/** All figures together, and each by itself: SVG as frozen, PNG drawn from it by the browser. */
function Figures({
  figures,
  addresses,
  edition,
}: {
  figures: EditionView["files"];
  addresses: EditionAddresses;
  edition: EditionView;
}) {
  const [state, setState] = useState<"ready" | "making" | "failed">("ready");
  const make = async () => {
    setState("making");
    try {
      await saveFigures({
        figures: figures.map(({ name }) => ({ name, address: addresses.file(name) })),
        called: `${edition.ensemble.name} edition ${edition.number} figures`,
      });
      setState("ready");
    } catch {
      setState("failed");
    }
  };
  return (
    <li className="keep figures border-b border-rule py-2">
      <span className="flex flex-wrap items-baseline justify-between gap-x-4">
        <a
          className={linkClass}
          href={addresses.file("figures.zip")}
          download
          aria-label="All figures, figures.zip"
        >
          All figures
        </a>
        <span className="text-ink-2">SVG, zip</span>
      </span>
      <span className="mt-1 flex flex-wrap gap-x-4 text-xs">
        {figures.map(({ name }) => (
          <a
            key={name}
            className={`inline-flex min-h-6 items-center ${linkClass}`}
            href={addresses.file(name)}
            download
            aria-label={FILE_WORDS[name]?.title ?? name}
          >
            {(FILE_WORDS[name]?.title ?? name).replace(/^Figure: /, "")}
          </a>
        ))}
      </span>
      <span className="with-script print:hidden mt-1 flex min-h-6 flex-wrap items-center text-xs">
        <TextButton disabled={state === "making"} onClick={() => void make()}>
          {state === "making" ? "Drawing" : "SVG and PNG together, zip"}
        </TextButton>
        {state === "failed" ? (
          <span role="alert" className="ml-3 text-danger">
            The figures could not be fetched. The link may have ended; try again.
          </span>
        ) : null}
      </span>
    </li>
  );
}

function Line({
  name,
  to,
  bytes,
  sha256,
}: {
  name: string;
  to: string;
  bytes: number | null;
  sha256: string | null;
}) {
  const words = FILE_WORDS[name] ?? { title: name, format: "" };
  return (
    <li className="keep figures grid grid-cols-[minmax(0,1fr)_4rem_5rem] items-baseline gap-x-4 border-b border-rule py-2">
      <span className="min-w-0">
        <a className={linkClass} href={to} download aria-label={`${words.title}, ${name}`}>
          {words.title}
        </a>
        <span className="block text-xs text-ink-3">
          {name}
          {sha256 === null ? null : (
            <>
              , <span className="whitespace-nowrap">SHA-256 {sha256.slice(0, 8)} …</span>
            </>
          )}
        </span>
      </span>
      <span className="text-ink-2">{words.format}</span>
      <span className="text-right text-ink-2">{bytes === null ? "" : formatBytes(bytes)}</span>
    </li>
  );
}
