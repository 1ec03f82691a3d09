import { type RefObject, useEffect, useRef, useState } from "react";

export interface FullScreen {
  box: RefObject<HTMLDivElement | null>;
  on: boolean;
  offered: boolean;
  toggle(): void;
}

/** Lets an element fill the screen, where the browser can; Escape leaves. */
export function useFullScreen(): FullScreen {
  const box = useRef<HTMLDivElement>(null);
  const [on, setOn] = useState(false);
  const [offered, setOffered] = useState(false);
  useEffect(() => {
    setOffered(document.fullscreenEnabled);
    const changed = () => setOn(document.fullscreenElement === box.current && box.current !== null);
    document.addEventListener("fullscreenchange", changed);
    return () => document.removeEventListener("fullscreenchange", changed);
  }, []);
  const toggle = () => {
    if (document.fullscreenElement) void document.exitFullscreen();
    // A browser may still refuse (a frame without the permission): then the view stays as it is.
    else box.current?.requestFullscreen().catch(() => setOffered(false));
  };
  return { box, on, offered, toggle };
}
