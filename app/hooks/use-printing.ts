import { useEffect, useState } from "react";
import { flushSync } from "react-dom";

/** True while the page goes to paper: then what the screen shows in part stands there whole. */
export function usePrinting(): boolean {
  const [printing, setPrinting] = useState(false);
  useEffect(() => {
    const paper = matchMedia("print");
    // The browser takes its picture as soon as the event is over.
    const begin = () => flushSync(() => setPrinting(true));
    const end = () => setPrinting(false);
    const follow = () => (paper.matches ? begin() : end());
    window.addEventListener("beforeprint", begin);
    window.addEventListener("afterprint", end);
    paper.addEventListener("change", follow);
    return () => {
      window.removeEventListener("beforeprint", begin);
      window.removeEventListener("afterprint", end);
      paper.removeEventListener("change", follow);
    };
  }, []);
  return printing;
}
