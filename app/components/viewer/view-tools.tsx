import { Camera, Hash, Maximize, Minimize, RotateCcw } from "lucide-react";
import { IconButton } from "~/components/ui/button";
import type { FullScreen } from "./use-full-screen";

/** The tools in the corner of the picture. Below 1024 px the atom numbers move into the options. */
export function ViewTools({
  onReset,
  numbers,
  onNumbers,
  onSave,
  fullScreen,
}: {
  onReset(): void;
  numbers: boolean;
  onNumbers(): void;
  onSave(): void;
  fullScreen: FullScreen;
}) {
  return (
    <div className="absolute top-1 right-1 flex lg:top-2 lg:right-2 pointer-coarse:-top-1 pointer-coarse:[&_button]:w-9 print:hidden">
      <IconButton label="Reset view" onClick={onReset}>
        <RotateCcw aria-hidden="true" />
      </IconButton>
      <IconButton label="Atom numbers" aria-pressed={numbers} onClick={onNumbers} className="max-lg:hidden">
        <Hash aria-hidden="true" />
      </IconButton>
      <IconButton label="Save picture" onClick={onSave}>
        <Camera aria-hidden="true" />
      </IconButton>
      {fullScreen.offered ? (
        <IconButton label={fullScreen.on ? "Leave full width" : "Full width"} onClick={fullScreen.toggle}>
          {fullScreen.on ? <Minimize aria-hidden="true" /> : <Maximize aria-hidden="true" />}
        </IconButton>
      ) : null}
    </div>
  );
}
