import { useCallback, useRef, useState } from "react";
import { useRevalidator } from "react-router";
import { showToast } from "~/components/ui/toast";
import { useUndoAdded } from "~/hooks/use-undo-added";
import type { ColumnsPreview } from "~/lib/api/schemas";
import { plural } from "~/lib/format";
import { type ColumnChoiceField, previewColumns, type Refused, saveColumns } from "./send-columns";

export interface AddedFile {
  file: File | null;
  fields: Readonly<Record<string, string>>;
  choices: readonly ColumnChoiceField[];
  preview: ColumnsPreview | null;
  refused: Refused | null;
  busy: "reading" | "saving" | null;
  choose(files: File[]): void;
  /** Sets answers and looks again; "" takes an answer back. */
  answer(fields: Record<string, string>): void;
  decide(choice: ColumnChoiceField): void;
  /** Puts the numbers in the place of the columns of their names, each as the kind that it is shown as. */
  putInPlace(on: boolean): void;
  save(): void;
  clear(): void;
}

/** A file on its way to becoming columns: looked at by the server with every answer, kept once nothing is open. */
export function useAddedFile(ensembleId: string): AddedFile {
  const [file, setFile] = useState<File | null>(null);
  const [fields, setFields] = useState<Record<string, string>>({});
  const [choices, setChoices] = useState<ColumnChoiceField[]>([]);
  const [preview, setPreview] = useState<ColumnsPreview | null>(null);
  const [refused, setRefused] = useState<Refused | null>(null);
  const [busy, setBusy] = useState<AddedFile["busy"]>(null);
  const { revalidate } = useRevalidator();
  const undoable = useUndoAdded(ensembleId);
  const turn = useRef(0);

  const look = useCallback(
    async (next: File, answers: Record<string, string>, chosen: ColumnChoiceField[]) => {
      turn.current += 1;
      const mine = turn.current;
      setBusy("reading");
      const answer = await previewColumns({ ensembleId, file: next, fields: answers, choices: chosen });
      // A later answer has asked again meanwhile.
      if (mine !== turn.current) return;
      setBusy(null);
      setRefused(answer.ok ? null : answer.refused);
      if (answer.ok) setPreview(answer.body);
    },
    [ensembleId],
  );

  const clear = () => {
    turn.current += 1;
    setFile(null);
    setFields({});
    setChoices([]);
    setPreview(null);
    setRefused(null);
    setBusy(null);
  };

  return {
    file,
    fields,
    choices,
    preview,
    refused,
    busy,
    choose(files) {
      const [first] = files;
      if (first === undefined) return;
      clear();
      setFile(first);
      void look(first, {}, []);
    },
    answer(more) {
      const next = Object.fromEntries(
        Object.entries({ ...fields, ...more }).filter(([, value]) => value !== ""),
      );
      setFields(next);
      if (file) void look(file, next, choices);
    },
    decide(choice) {
      const before = choices.find(({ column }) => column === choice.column);
      const next = [...choices.filter(({ column }) => column !== choice.column), { ...before, ...choice }];
      setChoices(next);
      if (file) void look(file, fields, next);
    },
    putInPlace(on) {
      const { replace: _, ...others } = fields;
      const answers = on ? { ...others, replace: "true" } : others;
      // Asked to replace, the server would take the kind of the old column where none is stated.
      const stated = (preview?.columns ?? []).flatMap(({ column, kind, exists }) =>
        exists && column !== null ? [{ ...choices.find((one) => one.column === column), column, kind }] : [],
      );
      const next = on
        ? [...choices.filter((one) => !stated.some(({ column }) => column === one.column)), ...stated]
        : [...choices];
      setFields(answers);
      setChoices(next);
      if (file) void look(file, answers, next);
    },
    async save() {
      if (file === null) return;
      setBusy("saving");
      const answer = await saveColumns({ ensembleId, file, fields, choices });
      if (!answer.ok) {
        setBusy(null);
        setRefused(answer.refused);
        return;
      }
      const { columns } = answer.body;
      const said = `${plural(columns.length, "column")} added from ${file.name}.`;
      // Numbers that were replaced are gone: only what is new can be taken back.
      if (fields.replace === "true") showToast({ tone: "done", text: said });
      else undoable(columns, said);
      clear();
      void revalidate();
    },
    clear,
  };
}
