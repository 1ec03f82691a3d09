import { useEffect, useRef } from "react";
import { href, useRevalidator } from "react-router";
import useSWR from "swr";
import { ProgressBar } from "~/components/ui/progress-bar";
import { formatPercent } from "~/lib/format";
import type { SiftStatus } from "~/lib/views";

interface Progress {
  id: string;
  status: SiftStatus;
  progress: number;
}

async function fetchProgress(url: string): Promise<Progress> {
  const response = await fetch(url, { headers: { Accept: "application/json" } });
  if (!response.ok) throw new Error(`The sift answered ${response.status}.`);
  return response.json();
}

const EVERY_MS = 1500;

/** A sift under way in a table: its share, asked every 1.5 s; the page is read again when it ends. */
export function SiftProgress({ sift }: { sift: Progress }) {
  const { data } = useSWR(href("/files/sifts/:id", { id: sift.id }), fetchProgress, {
    fallbackData: sift,
    refreshInterval: EVERY_MS,
  });
  const revalidator = useRevalidator();
  const told = useRef(false);
  const status = data?.status ?? sift.status;
  const over = status !== "queued" && status !== "running";
  useEffect(() => {
    if (!over || told.current) return;
    told.current = true;
    revalidator.revalidate();
  }, [over, revalidator]);

  const share = data?.progress ?? sift.progress;
  return (
    <div>
      <ProgressBar share={share} label="Sift" />
      <span className="text-xs text-ink-3">
        {status === "queued" ? "sift waits for its turn" : `sift running, ${formatPercent(share)}`}
      </span>
    </div>
  );
}
