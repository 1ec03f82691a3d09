import { createContext, type ReactNode, useCallback, useContext, useEffect, useRef } from "react";
import type { FigureFact } from "./export-figure";

const Context = createContext<() => readonly FigureFact[]>(() => []);

/**
 * What the numbers of all figures inside belong to: temperature, level, weights. It travels into every file of a figure.
 * Facts of an inner one stand in the place of outer ones of the same name; null takes one away.
 */
export function FigureFacts({
  facts,
  children,
}: {
  facts: readonly (Omit<FigureFact, "value"> & { value: FigureFact["value"] | null })[];
  children: ReactNode;
}) {
  const outer = useContext(Context);
  const latest = useRef(facts);
  useEffect(() => {
    latest.current = facts;
  });
  // Read at the click only: a slider must not draw every figure again for what stands in no drawing.
  const read = useCallback(() => {
    const own = new Set(latest.current.map(({ name }) => name));
    return [
      ...outer().filter(({ name }) => !own.has(name)),
      ...latest.current.flatMap(({ value, ...fact }) => (value === null ? [] : [{ ...fact, value }])),
    ];
  }, [outer]);
  return <Context.Provider value={read}>{children}</Context.Provider>;
}

/** Asks for the facts as they are now. */
export function useFigureFacts(): () => readonly FigureFact[] {
  return useContext(Context);
}
