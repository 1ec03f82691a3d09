import { Download, Printer } from "lucide-react";
import type { ReactNode } from "react";
import { BrandMark } from "~/components/layout/brand";
import { Badge } from "~/components/ui/badge";
import { Button, buttonClass } from "~/components/ui/button";
import type { EditionView } from "~/lib/edition/views";
import { formatDate } from "~/lib/format";
import type { EditionAddresses } from "./addresses";
import "./edition-print.css";

const SIDES = "mx-auto w-full max-w-[72rem] px-4 sm:px-6 xl:px-8";

/** Bar, content and foot of an edition: no rail, no controls but print and download. */
export function EditionShell({
  edition,
  addresses,
  note,
  back,
  foot,
  children,
}: {
  edition: EditionView;
  addresses: EditionAddresses;
  /** Beside the edition's number: when the link ends. */
  note: string;
  back?: ReactNode;
  foot: string;
  children: ReactNode;
}) {
  return (
    <div className="edition-report min-h-dvh">
      <div className="edition-body">
        <header className="border-b border-rule print:border-0">
          <div className="flex min-h-13 flex-wrap items-center gap-x-4 gap-y-1 px-4 py-2 sm:px-6 xl:px-8 print:px-0">
            <span className="flex items-center gap-2 text-base font-semibold">
              <BrandMark />
              Lowlying
            </span>
            <span className="flex items-center gap-3 print:hidden">
              <Badge tone="locked">Read only</Badge>
              {back}
            </span>
            <span className="figures text-ink-2 max-sm:order-last max-sm:w-full max-sm:text-xs">
              Edition {edition.number} · {note}
            </span>
            <span className="ml-auto flex gap-2 print:hidden">
              <Button
                size="sm"
                className="max-sm:hidden"
                icon={<Printer aria-hidden="true" />}
                onClick={() => window.print()}
              >
                Print
              </Button>
              <a className={buttonClass({ size: "sm" })} href={addresses.file("bundle.zip")} download>
                <Download aria-hidden="true" />
                Download
              </a>
            </span>
          </div>
        </header>
        <main className={`${SIDES} pt-8 pb-12 max-sm:pt-5 print:max-w-none print:px-0 print:pt-4 print:pb-0`}>
          {children}
        </main>
        <footer className="border-t border-rule text-xs text-ink-3 print:hidden">
          <p className={`${SIDES} figures py-4`}>{foot}</p>
        </footer>
      </div>
      <div className="edition-foot figures text-xs text-ink-3">
        <p className="pt-3">
          {edition.ensemble.name}, edition {edition.number}, {formatDate(edition.frozenAt)}, Lowlying{" "}
          {edition.version}
          <br />
          SHA-256 {edition.contentSha256}
        </p>
      </div>
    </div>
  );
}
