import { useState } from "react";
import { linkClass, TextButton } from "~/components/ui/text-link";
import { FILE_WORDS } from "~/lib/edition/edition-files";
import type { EditionView } from "~/lib/edition/views";
import { formatBytes, formatChecksum } from "~/lib/format";
import type { EditionAddresses } from "./addresses";
import { EditionHead } from "./edition-head";
import { saveFigures } from "./save-figures";

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
      <Checksums edition={edition} />
      <ul className="mt-3 border-t border-rule print:hidden">
        {others.map(({ name, bytes, sha256 }) => (
          <Line key={name} name={name} to={addresses.file(name)} bytes={bytes} sha256={sha256} />
        ))}
        {figures.length > 0 ? <Figures figures={figures} addresses={addresses} edition={edition} /> : null}
        {packed.map((name) => (
          <Line key={name} name={name} to={addresses.file(name)} bytes={null} sha256={null} />
        ))}
      </ul>
      {edition.sources.length > 0 ? (
        <div className="print:hidden">
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
        </div>
      ) : null}
      <p className="figures mt-2 text-xs text-ink-3">
        {edition.sources.length === 0 ? "Source files are not part of this link. " : ""}
        Edition checksum: SHA-256{" "}
        <span title={edition.contentSha256} className="print:hidden">
          {formatChecksum(edition.contentSha256)}
        </span>
        <span className="not-print:hidden">of results.json</span>. Computed with Lowlying {edition.version},
        where the same recipe gives the same digits.
      </p>
    </section>
  );
}

/** On paper: every file with its whole checksum, so that a copy can be checked against the page in hand. */
function Checksums({ edition }: { edition: EditionView }) {
  const files = [
    ...edition.files.map(({ name, bytes, sha256 }) => ({ name, bytes, sha256 })),
    ...edition.sources.map(({ name, bytes, sha256 }) => ({ name: `${name} (source)`, bytes, sha256 })),
  ];
  return (
    <table
      aria-label="Checksums of the files"
      className="figures mt-3 w-full border-collapse text-xs not-print:hidden"
    >
      <thead>
        <tr className="border-b border-rule-2 text-left">
          <th className="py-1 font-medium">File</th>
          <th className="px-3 py-1 text-right font-medium">Size</th>
          <th className="py-1 font-medium">SHA-256</th>
        </tr>
      </thead>
      <tbody>
        {files.map(({ name, bytes, sha256 }) => (
          <tr key={`${name} ${sha256}`} className="border-b border-rule align-baseline">
            <td className="py-1 [overflow-wrap:anywhere]">{name}</td>
            <td className="px-3 py-1 text-right whitespace-nowrap text-ink-2">{formatBytes(bytes)}</td>
            <td className="w-0 py-1 text-[0.625rem] whitespace-nowrap">{sha256}</td>
          </tr>
        ))}
      </tbody>
    </table>
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
      <span className="with-script mt-1 flex min-h-6 flex-wrap items-center text-xs">
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
