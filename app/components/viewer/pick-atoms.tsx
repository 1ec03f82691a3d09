import { useId, useRef, useState } from "react";
import { Button } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { atomName } from "~/lib/chem/elements";
import { readPicks } from "~/lib/view/read-picks";

/** Picks atoms by name: the same as clicking them, for the keyboard and for who does not see the picture. */
export function PickAtoms({
  elements,
  picked,
  onPick,
}: {
  elements: readonly number[];
  picked: readonly number[];
  onPick(atoms: number[]): void;
}) {
  const [draft, setDraft] = useState<string | null>(null);
  const [error, setError] = useState<string | null>(null);
  const [over, setOver] = useState(picked.join());
  // Atoms picked in the view are what is measured now, whatever was typed before.
  if (over !== picked.join()) {
    setOver(picked.join());
    setDraft(null);
    setError(null);
  }
  const around = useRef<HTMLDivElement>(null);
  const list = useId();
  const names = picked.map((atom) => atomName(elements, atom));
  const settle = (text: string) => {
    const read = readPicks(text, elements);
    setError(read.ok ? null : read.message);
    if (!read.ok) return;
    setDraft(null);
    if (read.atoms.join() !== picked.join()) onPick(read.atoms);
  };
  // The last name is being typed: what stands before it is kept by every suggestion.
  const before = (draft ?? "").replace(/\S*$/, "");
  return (
    <div ref={around} className="flex items-start gap-2">
      <TextField
        className="flex-1"
        label="Atoms to measure"
        placeholder={elements.length > 3 ? "for example 1 2 3 4" : undefined}
        value={draft ?? names.join(" ")}
        error={error}
        list={draft === null ? undefined : list}
        autoComplete="off"
        spellCheck={false}
        onChange={(event) => setDraft(event.currentTarget.value)}
        onBlur={() => draft !== null && settle(draft)}
        onKeyDown={(event) => {
          if (event.key === "Enter") {
            event.preventDefault();
            settle(event.currentTarget.value);
          }
          if (event.key === "Escape" && draft !== null) {
            setDraft(null);
            setError(null);
          }
        }}
      />
      <datalist id={list}>
        {draft === null
          ? null
          : elements.map((_, atom) => <option key={atom} value={`${before}${atomName(elements, atom)}`} />)}
      </datalist>
      <Button
        kind="quiet"
        className="mt-6"
        disabled={picked.length === 0}
        onClick={() => {
          onPick([]);
          // The button has nothing more to clear and cannot keep the focus.
          around.current?.querySelector("input")?.focus();
        }}
      >
        Clear
      </Button>
    </div>
  );
}
