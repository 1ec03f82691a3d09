import { Download } from "lucide-react";
import { useEffect, useRef, useState } from "react";
import { href } from "react-router";
import useSWR from "swr";
import { Button, buttonClass } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { ProgressBar } from "~/components/ui/progress-bar";
import { TextButton } from "~/components/ui/text-link";
import { failureWords } from "~/hooks/failure-words";
import { hasEnded } from "~/hooks/use-sift";
import { useTimeLeft } from "~/hooks/use-time-left";
import { formatCount, formatSeconds, plural } from "~/lib/format";
import type { MatrixState } from "~/services/matrices/find-matrix.server";
import { useWorkbench } from "./workbench-context";

const MOST = 5000;

async function read(response: Response): Promise<MatrixState> {
  if (response.ok) return (await response.json()) as MatrixState;
  const problem = (await response.json().catch(() => null)) as { detail?: string } | null;
  throw new Error(problem?.detail ?? `The server refused this (${response.status}).`);
}

/** The distances of all pairs of the distinct set: computed by the server when asked for, kept, and downloaded. */
export function PairDistances() {
  const { sift, result, ensemble } = useWorkbench();
  const [asked, setAsked] = useState<MatrixState | null>(null);
  const [error, setError] = useState<string | null>(null);
  // biome-ignore lint/correctness/useExhaustiveDependencies: another sift has other pairs
  useEffect(() => {
    setAsked(null);
    setError(null);
  }, [sift?.id]);
  const follow = asked !== null && !hasEnded(asked.status) ? asked.id : null;
  const { data } = useSWR<MatrixState, Error>(
    follow === null ? null : `/files/matrices/${follow}?wait=1`,
    async (address: string) => read(await fetch(address)),
    { refreshInterval: 150, dedupingInterval: 0, revalidateOnFocus: false, errorRetryInterval: 2000 },
  );
  const latest = useRef(setAsked);
  // Who comes later, or may not compute, finds what was asked for before.
  const known = useSWR<MatrixState | null, Error>(
    sift === null || result === null ? null : href("/files/sifts/:id/pair-matrix", { id: sift.id }),
    async (address: string) => {
      const response = await fetch(address);
      return response.ok ? ((await response.json()) as { matrix: MatrixState | null }).matrix : null;
    },
    { revalidateOnFocus: false, revalidateIfStale: false },
  ).data;
  useEffect(() => {
    if (known) latest.current((now) => now ?? known);
  }, [known]);
  useEffect(() => {
    if (data && data.id === follow && hasEnded(data.status)) latest.current(data);
  }, [data, follow]);
  const state = data && data.id === follow ? data : asked;
  const left = useTimeLeft(follow, state?.progress ?? 0);
  if (sift === null || result === null || result.kept.length < 2) return null;
  const count = result.kept.length;
  const pairs = (count * (count - 1)) / 2;
  const ask = async () => {
    setError(null);
    try {
      const response = await fetch(href("/files/sifts/:id/pair-matrix", { id: sift.id }), {
        method: "POST",
        headers: { "content-type": "application/json", accept: "application/json" },
        body: JSON.stringify({ frames: "kept" }),
      });
      setAsked(await read(response));
    } catch (caught) {
      setError(failureWords(caught));
    }
  };
  const cancel = async () => {
    if (follow === null) return;
    try {
      setAsked(await read(await fetch(`/files/matrices/${follow}`, { method: "DELETE" })));
    } catch (caught) {
      setError(failureWords(caught));
    }
  };
  return (
    <div className="mt-9 print:hidden">
      <BlockHead title="Distances of all pairs">
        {state?.status === "done" ? (
          <a
            className={buttonClass({ size: "sm" })}
            href={href("/files/matrices/:id/distances.csv", { id: state.id })}
            download
          >
            <Download aria-hidden="true" />
            CSV
          </a>
        ) : ensemble.mayCompute && count <= MOST && follow === null ? (
          <Button size="sm" onClick={ask}>
            Compute {formatCount(pairs)} distances
          </Button>
        ) : null}
      </BlockHead>
      {follow !== null && state !== null ? (
        <div className="flex max-w-read items-center gap-4 text-xs text-ink-2" role="status">
          <span className="figures whitespace-nowrap">
            {state.status === "queued"
              ? "Waits for its turn"
              : `${formatCount(state.pairs)} of ${plural(state.of, "pair")}${left === null ? "" : `, ${formatSeconds(Math.max(1, Math.round(left)))} left`}`}
          </span>
          <span className="flex-1">
            <ProgressBar share={state.progress} label="Distances of all pairs" />
          </span>
          <TextButton onClick={cancel}>Cancel</TextButton>
        </div>
      ) : (
        <p className="max-w-read text-xs text-ink-3">
          {error !== null ? (
            <span role="alert" className="text-danger">
              {error}
            </span>
          ) : state?.status === "failed" ? (
            <span className="text-danger">{state.error ?? "The computation failed. Ask again."}</span>
          ) : count > MOST ? (
            `For up to ${formatCount(MOST)} conformers; narrow the energy window to have them.`
          ) : (
            "Symmetry-corrected, in the atoms and with the mirror rule of the sift, by frame numbers: for clustering or a map elsewhere."
          )}
        </p>
      )}
    </div>
  );
}
