import {
  type HTMLAttributes,
  type KeyboardEvent,
  type PointerEvent,
  useEffect,
  useRef,
  useState,
} from "react";
import { turnByDrag, zoomBy } from "~/lib/view/camera";
import type { Figure } from "~/lib/view/scene";
import { atomAt } from "~/lib/view/stage";
import type { View } from "./use-view";

/** Pixels a pointer may stray and still mean a click. */
const CLICK_SLACK = 4;
/** Pixels around an atom that still hit it, by a mouse and by a finger. */
const HIT = { mouse: 12, finger: 22 } as const;
const KEY_TURN_PX = 24;
const KEY_ZOOM = 1.15;

type Handlers = Pick<
  HTMLAttributes<HTMLDivElement>,
  | "onPointerDown"
  | "onPointerMove"
  | "onPointerUp"
  | "onPointerCancel"
  | "onPointerLeave"
  | "onKeyDown"
  | "style"
> & { ref(element: HTMLDivElement | null): void };

export interface Gestures {
  handlers: Handlers;
  /** Class of what touch does. */
  touch: string;
  hovered: { atom: number; figure: Figure } | null;
}

/**
 * Pointer, wheel and keys of a view. The wheel zooms only while the view has the focus or with Ctrl, and one finger
 * moves the page up and down until the view was tapped: who scrolls past it must not get stuck in it.
 *
 * @param alone the view fills the screen: no page to scroll
 */
export function useGestures(view: View, alone: boolean, onAtom: (atom: number) => void): Gestures {
  const [surface, setSurface] = useState<HTMLDivElement | null>(null);
  const [focused, setFocused] = useState(false);
  const [over, setOver] = useState<{ atom: number; figure: Figure } | null>(null);
  const pointers = useRef(new Map<number, { x: number; y: number }>());
  const strayed = useRef(false);
  const { scene, stage, camera, setCamera } = view;

  useFocusAndWheel(surface, setFocused, (event) => {
    const box = event.currentTarget as HTMLElement;
    if (!event.ctrlKey && document.activeElement !== box && !alone) return;
    event.preventDefault();
    const { left, top } = box.getBoundingClientRect();
    const cell = view.stage.cells[0];
    const at =
      cell && view.stage.cells.length === 1
        ? ([
            event.clientX - left - cell.x - cell.width / 2,
            event.clientY - top - cell.y - cell.height / 2,
          ] as const)
        : undefined;
    setCamera((last) => zoomBy(last, Math.exp(-event.deltaY * (event.ctrlKey ? 0.01 : 0.0015)), at));
  });

  const hit = (event: PointerEvent<HTMLDivElement>) => {
    const { left, top } = event.currentTarget.getBoundingClientRect();
    const slack = event.pointerType === "touch" ? HIT.finger : HIT.mouse;
    return atomAt(scene, stage, camera, event.clientX - left, event.clientY - top, slack);
  };

  const onPointerMove = (event: PointerEvent<HTMLDivElement>) => {
    const last = pointers.current.get(event.pointerId);
    if (!last) {
      const found = event.pointerType === "mouse" ? hit(event) : null;
      if (found?.atom !== over?.atom || found?.figure !== over?.figure) setOver(found);
      return;
    }
    const [dx, dy] = [event.clientX - last.x, event.clientY - last.y];
    if (!strayed.current && Math.hypot(dx, dy) < CLICK_SLACK) return;
    strayed.current = true;
    const others = [...pointers.current].filter(([id]) => id !== event.pointerId).map(([, point]) => point);
    const other = others[0];
    pointers.current.set(event.pointerId, { x: event.clientX, y: event.clientY });
    if (other) {
      // Two fingers: their distance zooms, their middle shifts.
      const before = Math.hypot(last.x - other.x, last.y - other.y);
      const now = Math.hypot(event.clientX - other.x, event.clientY - other.y);
      setCamera((from) => shifted(zoomBy(from, now / Math.max(1, before)), dx / 2, dy / 2));
    } else if (event.shiftKey || event.buttons === 4 || event.buttons === 2) {
      setCamera((from) => shifted(from, dx, dy));
    } else {
      setCamera((from) => turnByDrag(from, dx, dy, Math.min(stage.width, stage.height) / 2));
    }
  };

  const handlers: Handlers = {
    ref: setSurface,
    onPointerDown(event) {
      event.currentTarget.setPointerCapture(event.pointerId);
      pointers.current.set(event.pointerId, { x: event.clientX, y: event.clientY });
      if (pointers.current.size === 1) strayed.current = false;
      else strayed.current = true;
      setOver(null);
    },
    onPointerMove,
    onPointerUp(event) {
      const clicked = pointers.current.delete(event.pointerId) && !strayed.current && event.button === 0;
      const found = clicked ? hit(event) : null;
      if (found) onAtom(found.atom);
    },
    onPointerCancel(event) {
      pointers.current.delete(event.pointerId);
    },
    onPointerLeave() {
      setOver(null);
    },
    onKeyDown(event) {
      if (event.ctrlKey || event.metaKey || event.altKey) return;
      if (onKey(event, view)) event.preventDefault();
    },
  };
  // A hovered atom of a scene that is gone must not be marked in the next one.
  return {
    handlers,
    // Class, not style: the page's policy allows no style in the markup.
    touch: alone || focused ? "touch-none" : "touch-pan-y",
    hovered: over && scene.strong.includes(over.figure) ? over : null,
  };
}

function onKey(event: KeyboardEvent, { stage, setCamera, reset }: View): boolean {
  const radius = Math.min(stage.width, stage.height) / 2;
  const step = event.shiftKey ? KEY_TURN_PX / 4 : KEY_TURN_PX;
  const turn = (dx: number, dy: number) =>
    setCamera((from) => turnByDrag(from, dx * step, dy * step, radius));
  switch (event.key) {
    case "ArrowLeft":
      turn(-1, 0);
      return true;
    case "ArrowRight":
      turn(1, 0);
      return true;
    case "ArrowUp":
      turn(0, -1);
      return true;
    case "ArrowDown":
      turn(0, 1);
      return true;
    case "+":
    case "=":
      setCamera((from) => zoomBy(from, KEY_ZOOM));
      return true;
    case "-":
      setCamera((from) => zoomBy(from, 1 / KEY_ZOOM));
      return true;
    case "0":
    case "Home":
      reset();
      return true;
    default:
      return false;
  }
}

function shifted<C extends { shift: readonly [number, number] }>(camera: C, dx: number, dy: number): C {
  return { ...camera, shift: [camera.shift[0] + dx, camera.shift[1] + dy] };
}

/** The wheel has to be taken without "passive", which React's own handlers are; the focus changes what touch may do. */
function useFocusAndWheel(
  element: HTMLDivElement | null,
  onFocus: (focused: boolean) => void,
  onWheel: (event: WheelEvent) => void,
): void {
  const wheel = useRef(onWheel);
  useEffect(() => {
    wheel.current = onWheel;
  });
  useEffect(() => {
    if (!element) return;
    const turned = (event: WheelEvent) => wheel.current(event);
    const focus = () => onFocus(true);
    const blur = () => onFocus(false);
    element.addEventListener("wheel", turned, { passive: false });
    element.addEventListener("focus", focus);
    element.addEventListener("blur", blur);
    return () => {
      element.removeEventListener("wheel", turned);
      element.removeEventListener("focus", focus);
      element.removeEventListener("blur", blur);
    };
  }, [element, onFocus]);
}
