import { useMemo, useRef, useState } from "react";
import useSWR from "swr";
import type { SiftRequest } from "~/lib/recipe/recipe";
import type { SiftStatus } from "~/lib/views";
import { failureWords } from "./failure-words";

interface SiftState {
  id: string;
  status: SiftStatus;
  progress: number;
  /** Pairs compared so far, while it runs. */
  pairs?: number;
  error?: string | null;
  /** The server did not answer the last question: what is known is of before. */
  silent?: true;
}

/** After a failure the state is asked for again this often, however long the server is away. */
const AGAIN_MS = 2000;

export function hasEnded(status: SiftStatus): boolean {
  return status === "done" || status === "failed" || status === "cancelled";
}

async function askState(address: string): Promise<SiftState> {
  const response = await fetch(address, { headers: { accept: "application/json" } });
  if (isAway(response.status)) throw new NoAnswer();
  if (!response.ok) throw new Error(await problemWords(response));
  return (await response.json()) as SiftState;
}

/** What the server says went wrong, in its own words. */
async function problemWords(response: Response): Promise<string> {
  try {
    const problem = (await response.json()) as {
      detail?: string;
      title?: string;
      errors?: { message: string }[];
    };
    const first = problem.errors?.[0]?.message;
    return (
      [problem.detail ?? problem.title, first].filter(Boolean).join(" ") || `Refused (${response.status}).`
    );
  } catch {
    return `The server refused this (${response.status}).`;
  }
}

/**
 * Follows a sift that waits or runs.
 *
 * @param id null where there is nothing to follow
 */
export function useRunningSift(id: string | null): SiftState | null {
  const { data, error } = useSWR<SiftState, Error>(
    id === null ? null : `/files/sifts/${id}?wait=1`,
    (address: string) => askState(address),
    {
      refreshInterval: (state) => (state && hasEnded(state.status) ? 0 : 150),
      dedupingInterval: 0,
      revalidateOnFocus: false,
      // Not the library's own rule, which waits longer each time: after a restart the page would stand still for minutes.
      onErrorRetry: (_error, _key, _config, again, { retryCount }) => {
        setTimeout(() => void again({ retryCount }), AGAIN_MS);
      },
    },
  );
  return useMemo(() => {
    if (data === undefined || data.id !== id) return null;
    return error === undefined ? data : { ...data, silent: true };
  }, [data, error, id]);
}

/**
 * Makes a known set the ensemble's own again, the one that every page shows where no other is named: the same recipe is
 * the same sift, so asking once more computes nothing.
 */
export function makeCurrent(ensembleId: string, request: SiftRequest): void {
  void fetch(`/files/ensembles/${ensembleId}/sifts`, {
    method: "POST",
    headers: { "content-type": "application/json", accept: "application/json" },
    body: JSON.stringify(request),
  }).catch(() => undefined);
}

async function askForSift(ensembleId: string, request: SiftRequest): Promise<SiftState> {
  const response = await fetch(`/files/ensembles/${ensembleId}/sifts`, {
    method: "POST",
    headers: { "content-type": "application/json", accept: "application/json" },
    body: JSON.stringify(request),
  });
  if (isAway(response.status)) throw new NoAnswer();
  if (!response.ok) throw new Error(await problemWords(response));
  return (await response.json()) as SiftState;
}

/** Thrown where a server stands behind that does not answer now, as during a restart. */
class NoAnswer extends Error {}

function isAway(status: number): boolean {
  return status === 502 || status === 503 || status === 504;
}

/**
 * Calls until there is an answer, however long the server is away.
 *
 * @param wanted false ends it: null, unless the answer is there
 * @param silent hears whether the last call went unanswered
 * @throws what the server refuses
 */
export async function untilAnswered<T>(
  call: () => Promise<T>,
  wanted: () => boolean,
  silent: (silent: boolean) => void,
  pause: () => Promise<void> = () => new Promise((on) => setTimeout(on, AGAIN_MS)),
): Promise<T | null> {
  while (wanted()) {
    try {
      const answer = await call();
      if (wanted()) silent(false);
      return answer;
    } catch (error) {
      // A browser says "no connection" with a TypeError.
      if (!(error instanceof TypeError || error instanceof NoAnswer)) throw error;
      if (!wanted()) return null;
      silent(true);
      await pause();
    }
  }
  return null;
}

export interface Asked {
  id: string;
  progress: number;
  pairs?: number;
  /** What is being computed. */
  request: SiftRequest;
}

/**
 * Asks for sifts with other settings. The newest question counts: an older one still running is cancelled. The result
 * comes as an id; the page then shows that sift. While the server is away, `silent`, it is asked again and again.
 */
export function useNewSift(ensembleId: string, onDone: (siftId: string) => void) {
  const [asked, setAsked] = useState<Asked | null>(null);
  const [error, setError] = useState<string | null>(null);
  const [silent, setSilent] = useState(false);
  const turn = useRef(0);
  const done = useRef(onDone);
  done.current = onDone;
  const running = useRef<string | null>(null);

  const drop = (id: string | null) => {
    if (id !== null) void fetch(`/files/sifts/${id}`, { method: "DELETE" }).catch(() => undefined);
  };

  const ask = async (request: SiftRequest) => {
    turn.current += 1;
    const mine = turn.current;
    const before = running.current;
    running.current = null;
    setError(null);
    // The same recipe is the same sift: asked again after a lost connection it is followed, not computed twice.
    const again = <T>(call: () => Promise<T>) => untilAnswered(call, () => mine === turn.current, setSilent);
    try {
      let state = await again(() => askForSift(ensembleId, request));
      if (before !== (state?.id ?? running.current)) drop(before);
      if (state === null) return;
      if (mine !== turn.current) return;
      running.current = state.id;
      setAsked({ id: state.id, progress: state.progress, request });
      while (!hasEnded(state.status)) {
        const id: string = state.id;
        state = await again(() => askState(`/files/sifts/${id}?wait=1`));
        if (state === null || mine !== turn.current) return;
        setAsked({ id: state.id, progress: state.progress, pairs: state.pairs, request });
      }
      running.current = null;
      setAsked(null);
      if (state.status === "done") done.current(state.id);
      else if (state.status === "failed") setError(state.error ?? "This sift failed.");
      else setError("Somebody cancelled this sift.");
    } catch (caught) {
      if (mine !== turn.current) return;
      running.current = null;
      setAsked(null);
      setSilent(false);
      setError(failureWords(caught));
    }
  };

  const cancel = () => {
    turn.current += 1;
    drop(running.current);
    running.current = null;
    setAsked(null);
    setSilent(false);
  };

  return { ask, cancel, asked, silent, error, clearError: () => setError(null) };
}
