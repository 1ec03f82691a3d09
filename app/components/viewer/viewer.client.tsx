import * as library from "3dmol";
import { useEffect, useLayoutEffect, useRef, useState } from "react";
import type { Camera } from "~/lib/view/camera";
import type { Scene } from "~/lib/view/scene";
import type { Stage } from "~/lib/view/stage";
import { type GlView, openGlView } from "./gl-view";
import { type Palette, readPalette } from "./look";

export interface CanvasProps {
  scene: Scene;
  stage: Stage;
  camera: Camera;
  /** Called with the canvas once the first picture stands, and with null when it is gone. */
  onReady(canvas: HTMLCanvasElement | null): void;
  /** The browser gives no WebGL 2, or took it away again and again. */
  onFail(): void;
}

/** Browsers take contexts away from pages in the background; one that does so over and over is left alone. */
const MOST_RESTARTS = 3;

/** The molecules on a WebGL canvas. The only importer of 3dmol: loaded on demand, never on the server. */
export default function ViewerCanvas({ scene, stage, camera, onReady, onFail }: CanvasProps) {
  const host = useRef<HTMLDivElement>(null);
  const [view, setView] = useState<GlView | null>(null);
  const [restarts, setRestarts] = useState(0);
  const palette = usePalette();
  const told = useRef({ onReady, onFail });
  told.current = { onReady, onFail };
  const ground = useRef(palette.view.hex);
  ground.current = palette.view.hex;

  useEffect(() => {
    if (!host.current) return;
    const lost = () => {
      if (restarts < MOST_RESTARTS) setRestarts(restarts + 1);
      else told.current.onFail();
    };
    let opened: GlView;
    try {
      opened = openGlView(library, host.current, ground.current, lost);
    } catch {
      // The library throws texts and errors alike; whatever it was, the still picture does the work.
      told.current.onFail();
      return;
    }
    setView(opened);
    return () => {
      opened.dispose();
      setView(null);
      told.current.onReady(null);
    };
  }, [restarts]);

  const drawn = useRef<{ view: GlView; scene: Scene; palette: Palette; reach: number } | null>(null);
  useLayoutEffect(() => {
    if (!view) return;
    const last = drawn.current;
    const same =
      last?.view === view && last.scene === scene && last.palette === palette && last.reach === stage.reach;
    if (!same) {
      view.draw(scene, stage, palette);
      drawn.current = { view, scene, palette, reach: stage.reach };
    }
    view.show(stage, camera);
    if (last?.view !== view) told.current.onReady(view.canvas);
  }, [view, scene, stage, camera, palette]);

  return <div ref={host} aria-hidden="true" className="absolute inset-0 print:hidden" />;
}

/** The colours of the tokens, read again when the theme changes by the system or by hand. */
function usePalette(): Palette {
  const [palette, setPalette] = useState(readPalette);
  useEffect(() => {
    const reread = () => setPalette(readPalette());
    const system = matchMedia("(prefers-color-scheme: dark)");
    system.addEventListener("change", reread);
    const watch = new MutationObserver(reread);
    watch.observe(document.documentElement, { attributes: true, attributeFilter: ["data-theme"] });
    return () => {
      system.removeEventListener("change", reread);
      watch.disconnect();
    };
  }, []);
  return palette;
}
