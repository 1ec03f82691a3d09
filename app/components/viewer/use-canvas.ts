import { type ComponentType, useCallback, useEffect, useMemo, useState } from "react";
import type { CanvasProps } from "./viewer.client";

export interface LazyCanvas {
  /** Null until it is loaded, and for good where it failed. */
  Canvas: ComponentType<CanvasProps> | null;
  /** Once the first picture stands on it. */
  element: HTMLCanvasElement | null;
  failure: "no WebGL" | "not loaded" | null;
  onReady(canvas: HTMLCanvasElement | null): void;
  onFail(): void;
}

/** Loads the canvas once the page stands; the still picture is there meanwhile, and remains if loading fails. */
export function useCanvas(): LazyCanvas {
  const [Canvas, setCanvas] = useState<ComponentType<CanvasProps> | null>(null);
  const [element, setElement] = useState<HTMLCanvasElement | null>(null);
  const [failure, setFailure] = useState<LazyCanvas["failure"]>(null);
  useEffect(() => {
    let here = true;
    import("./viewer.client").then(
      (module) => here && setCanvas(() => module.default),
      () => here && setFailure("not loaded"),
    );
    return () => {
      here = false;
    };
  }, []);
  const onFail = useCallback(() => {
    setElement(null);
    setFailure("no WebGL");
  }, []);
  return { Canvas: failure === null ? Canvas : null, element, failure, onReady: setElement, onFail };
}

/** Milliseconds after the last movement in which a picture that nobody sees is drawn again. */
const QUIET_MS = 400;

/** A value as it is, or, where it may lag, as it was when it last stood still. */
export function useQuiet<T>(value: T, lagging: boolean): T {
  const [settled, setSettled] = useState(value);
  useEffect(() => {
    if (!lagging) return;
    const timer = setTimeout(() => setSettled(value), QUIET_MS);
    return () => clearTimeout(timer);
  }, [value, lagging]);
  return lagging ? settled : value;
}

/** The same array as long as its numbers are the same. */
export function useStable(list: number[]): number[] {
  const key = list.join(" ");
  // biome-ignore lint/correctness/useExhaustiveDependencies: the key stands for the list
  return useMemo(() => list, [key]);
}
