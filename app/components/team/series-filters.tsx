import { Search } from "lucide-react";
import { useEffect, useRef } from "react";
import { Form, useSubmit } from "react-router";
import { Button } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { LevelName } from "~/components/ui/level-marker";
import { FilterSelect } from "~/components/ui/select-field";
import { ROW_STATES, type RowState, type SeriesState } from "~/lib/series-state";
import type { EnsembleRow } from "~/lib/views";

const STATE_WORDS: Record<RowState, string> = {
  ready: "sifted",
  asks: "question open",
  running: "sift running",
  failed: "sift failed",
  open: "not sifted",
};

/** Search and filters, kept in the address. A plain form underneath: Enter sends it where there is no script. */
export function SeriesFilters({
  state,
  levels,
  legend,
}: {
  state: SeriesState;
  /** Names of all levels at hand. */
  levels: readonly string[];
  /** Marker and name, where each marker means one level in all rows. */
  legend: EnsembleRow["levels"];
}) {
  const submit = useSubmit();
  const form = useRef<HTMLFormElement>(null);
  const timer = useRef<ReturnType<typeof setTimeout> | undefined>(undefined);
  useEffect(() => () => clearTimeout(timer.current), []);
  const send = () => {
    clearTimeout(timer.current);
    if (form.current) submit(withoutEmpty(form.current), { replace: true, preventScrollReset: true });
  };
  // The fields are the browser's own while somebody uses them; a link ("Show all") changes them from outside.
  useEffect(() => {
    const said: Record<string, string | null> = {
      q: state.q,
      level: state.level,
      state: state.state,
      held: state.held,
    };
    for (const [name, value] of Object.entries(said)) {
      const field = form.current?.elements.namedItem(name);
      const own = field instanceof HTMLInputElement || field instanceof HTMLSelectElement ? field : null;
      if (own && own !== document.activeElement) own.value = value ?? "";
    }
  }, [state]);
  const { sort } = state;
  return (
    <Form
      ref={form}
      method="get"
      role="search"
      aria-label="Ensembles"
      className="flex flex-wrap items-center gap-3 print:hidden"
      onSubmit={(event) => {
        event.preventDefault();
        send();
      }}
    >
      {state.series ? <input type="hidden" name="series" value={state.series} /> : null}
      <input type="hidden" name="sort" value={`${sort.down ? "-" : ""}${sort.by}`} />
      <TextField
        label="Search by name, formula, level or file"
        hideLabel
        name="q"
        type="search"
        defaultValue={state.q}
        placeholder="Name, formula, level or file"
        icon={<Search aria-hidden="true" />}
        className="w-full sm:w-72"
        onChange={() => {
          clearTimeout(timer.current);
          timer.current = setTimeout(send, 250);
        }}
      />
      <span className="flex flex-wrap gap-2">
        <FilterSelect
          label="Level"
          name="level"
          active={state.level !== null}
          defaultValue={state.level ?? ""}
          onChange={send}
          choices={[
            { value: "", label: "Level: any" },
            ...levels.map((level) => ({ value: level, label: `Level: ${level}` })),
          ]}
          className="max-w-56"
        />
        <FilterSelect
          label="State"
          name="state"
          active={state.state !== null}
          defaultValue={state.state ?? ""}
          onChange={send}
          choices={[
            { value: "", label: "State: any" },
            ...ROW_STATES.map((value) => ({ value, label: `State: ${STATE_WORDS[value]}` })),
          ]}
        />
        <FilterSelect
          label="Held"
          name="held"
          active={state.held !== null}
          defaultValue={state.held ?? ""}
          onChange={send}
          choices={[
            { value: "", label: "Held: any" },
            { value: "some", label: "Held: some" },
            { value: "none", label: "Held: none" },
          ]}
        />
      </span>
      <noscript>
        <Button type="submit" size="sm">
          Apply
        </Button>
      </noscript>
      <ul className="ml-auto flex flex-wrap gap-4 text-xs text-ink-3 max-xl:hidden">
        {legend.map((level) => (
          <li key={level.name}>
            <LevelName name={level.name} ordinal={level.ordinal} />
          </li>
        ))}
      </ul>
    </Form>
  );
}

/** The form's entries without empty ones and without the usual sort, so that the address stays short. */
function withoutEmpty(form: HTMLFormElement): URLSearchParams {
  const params = new URLSearchParams();
  for (const [name, value] of new FormData(form)) {
    if (typeof value === "string" && value !== "" && !(name === "sort" && value === "-changed"))
      params.set(name, value);
  }
  return params;
}
