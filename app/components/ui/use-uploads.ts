import { useCallback, useEffect, useReducer, useRef } from "react";
import { sendUpload, type UploadForm } from "./send-upload";
import { isUnderWay, nextToStart, type Taken, uploadList } from "./upload-list";

/** Enough to keep the line busy while one file is being read; more would only share the same line. */
const AT_ONCE = 2;

/**
 * The uploads of a page: two at a time, each with progress, cancel and result. Leaving the page while one is under way
 * asks first.
 *
 * @param onTaken called once for each ensemble that came of it
 */
export function useUploads(onTaken: (taken: Taken) => void) {
  const [list, dispatch] = useReducer(uploadList, []);
  const forms = useRef(new Map<number, UploadForm>());
  const stops = useRef(new Map<number, () => void>());
  const nextId = useRef(1);
  const tell = useRef(onTaken);
  useEffect(() => {
    tell.current = onTaken;
  });

  const next = nextToStart(list, AT_ONCE);
  useEffect(() => {
    if (!next) return;
    const { id } = next;
    const form = forms.current.get(id);
    if (!form) return;
    dispatch({ type: "start", id, now: performance.now() });
    const stop = sendUpload(
      form,
      (sent) => dispatch({ type: "progress", id, sent, now: performance.now() }),
      (frames) => dispatch({ type: "frames", id, frames }),
      (end) => {
        stops.current.delete(id);
        if (end.kind === "taken") {
          dispatch({ type: "taken", id, taken: end.taken });
          tell.current(end.taken);
        } else if (end.kind === "refused") dispatch({ type: "refused", id, refusal: end.refusal });
        else dispatch({ type: "failed", id });
      },
    );
    stops.current.set(id, stop);
  }, [next]);

  const underWay = isUnderWay(list);
  useEffect(() => {
    if (!underWay) return;
    const ask = (event: BeforeUnloadEvent) => event.preventDefault();
    window.addEventListener("beforeunload", ask);
    return () => window.removeEventListener("beforeunload", ask);
  }, [underWay]);

  // Going to another page of ours ends what is on the line: a half-sent file leaves nothing behind.
  useEffect(() => {
    const running = stops.current;
    return () => {
      for (const stop of running.values()) stop();
    };
  }, []);

  const add = useCallback((form: UploadForm) => {
    const id = nextId.current++;
    forms.current.set(id, form);
    const bytes = form.files.reduce((sum, file) => sum + file.size, 0);
    dispatch({ type: "add", id, names: form.files.map((file) => file.name), bytes });
  }, []);
  const cancel = useCallback((id: number) => {
    stops.current.get(id)?.();
    stops.current.delete(id);
    dispatch({ type: "cancel", id });
  }, []);
  const again = useCallback((id: number) => dispatch({ type: "again", id }), []);
  const dismiss = useCallback((id: number) => {
    forms.current.delete(id);
    dispatch({ type: "dismiss", id });
  }, []);

  return { list, underWay, add, cancel, again, dismiss };
}
