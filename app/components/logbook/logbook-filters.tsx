import { Download, Search } from "lucide-react";
import { Form, useLocation, useSubmit } from "react-router";
import { Button, buttonClass } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { FilterSelect } from "~/components/ui/select-field";
import type { LogbookFilter } from "~/lib/logbook/filter";
import { LOGBOOK_KINDS } from "~/lib/logbook/kinds";

const NAMES = ["kind", "who", "when", "text", "before"];

const WHEN = [
  { value: "all", label: "When: any time" },
  { value: "today", label: "When: today" },
  { value: "week", label: "When: seven days" },
  { value: "month", label: "When: thirty days" },
];

/** Who, what kind, when, which words; by address, so that it works without script and can be sent on. */
export function LogbookFilters({
  filter,
  people,
  csv,
}: {
  filter: LogbookFilter;
  people: readonly { id: string; name: string }[];
  /** Address of the same rows as CSV. */
  csv: string;
}) {
  const submit = useSubmit();
  const { search } = useLocation();
  const kept = [...new URLSearchParams(search)].filter(([name]) => !NAMES.includes(name));
  const kinds = [
    { value: "all", label: "Kind: all" },
    { value: "no-sign-ins", label: "Kind: all but sign-ins" },
    ...LOGBOOK_KINDS.map((kind) => ({ value: kind, label: `Kind: ${kind}` })),
  ];
  const who = [
    { value: "all", label: "Who: anyone" },
    ...people.map(({ id, name }) => ({ value: id, label: `Who: ${name}` })),
    { value: "token", label: "Who: tokens" },
    { value: "link", label: "Who: guests by link" },
    { value: "product", label: "Who: Lowlying itself" },
  ];
  return (
    <Form
      method="get"
      role="search"
      preventScrollReset
      className="flex flex-wrap items-end gap-2 print:hidden"
      onChange={(event) => {
        // The words are sent by Enter or the button; a choice acts at once.
        if (event.target instanceof HTMLSelectElement)
          void submit(event.currentTarget, { preventScrollReset: true });
      }}
    >
      {kept.map(([name, value]) => (
        <input key={name} type="hidden" name={name} value={value} />
      ))}
      <TextField
        label="Words of an entry"
        hideLabel
        name="text"
        defaultValue={filter.text}
        key={filter.text}
        maxLength={100}
        placeholder="Word, frame, file or edition"
        icon={<Search aria-hidden="true" />}
        className="w-full sm:w-64"
      />
      <FilterSelect
        label="Who"
        name="who"
        choices={who}
        defaultValue={filter.who}
        key={`w${filter.who}`}
        active={filter.who !== "all"}
        className="max-w-full"
      />
      <FilterSelect
        label="Kind"
        name="kind"
        choices={kinds}
        defaultValue={filter.kind}
        key={`k${filter.kind}`}
        active={filter.kind !== "all"}
        className="max-w-full"
      />
      <FilterSelect
        label="When"
        name="when"
        choices={WHEN}
        defaultValue={filter.when}
        key={`t${filter.when}`}
        active={filter.when !== "all"}
        className="max-w-full"
      />
      <Button type="submit" size="sm">
        Find
      </Button>
      <a className={`ml-auto ${buttonClass({ size: "sm" })}`} href={csv} download>
        <Download aria-hidden="true" />
        CSV
      </a>
    </Form>
  );
}
