import { useCallback, useMemo } from "react";
import { useLocation, useNavigate } from "react-router";
import { searchOf } from "~/lib/url-state";
import type { ConformerRow } from "~/lib/workbench/conformers";
import {
  type FoundBy,
  type FoundByChoice,
  foundByChoices,
  foundBySentence,
  foundByWords,
  isFoundBy,
  readFoundBy,
  writeFoundBy,
} from "~/lib/workbench/found-by";
import { useWorkbench } from "./workbench-context";

const KEY = "found";

export interface FoundByFilter {
  choices: FoundByChoice[];
  /** What is chosen, as it stands in the address and in words; null shows all. */
  chosen: string | null;
  words: string | null;
  /** Whether a conformer is shown. */
  shows: (row: ConformerRow) => boolean;
  narrow: (value: string | null) => void;
  /** What the searches have in common. */
  sentence: string;
  /** Batches in all. */
  of: number;
}

/** Which search or batch found the conformers: in the address, followed by table and figures. Null where there was one. */
export function useFoundBy(): FoundByFilter | null {
  const { ensemble, rows } = useWorkbench();
  const { search, pathname } = useLocation();
  const navigate = useNavigate();
  const asked = new URLSearchParams(search).get(KEY);
  const { files } = ensemble;
  const choices = useMemo(() => foundByChoices(rows, files), [rows, files]);
  const sentence = useMemo(() => foundBySentence(rows, files), [rows, files]);
  // What no conformer has would hide the whole table.
  const chosen = choices.some(({ value }) => value === asked) ? asked : null;
  const choice: FoundBy | null = useMemo(() => readFoundBy(chosen), [chosen]);
  const shows = useCallback((row: ConformerRow) => choice === null || isFoundBy(row, choice), [choice]);
  const narrow = useCallback(
    (value: string | null) => {
      const params = new URLSearchParams(search);
      const next = readFoundBy(value);
      if (next === null) params.delete(KEY);
      else params.set(KEY, writeFoundBy(next));
      void navigate(
        { pathname, search: searchOf(params) },
        { replace: true, preventScrollReset: true, defaultShouldRevalidate: false },
      );
    },
    [search, pathname, navigate],
  );
  const of = useMemo(() => new Set(files.map(({ batch }) => batch)).size, [files]);
  if (sentence === null) return null;
  const words = choice === null ? null : foundByWords(choice, files);
  return { choices, chosen: choice === null ? null : chosen, words, shows, narrow, sentence, of };
}
