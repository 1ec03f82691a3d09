import { FilterSelect } from "~/components/ui/select-field";
import type { FoundByFilter } from "./use-found-by";

/** Narrows a table to what a search or batch found. */
export function FoundBySelect({ foundBy }: { foundBy: FoundByFilter }) {
  return (
    <FilterSelect
      label="Found by which batch"
      active={foundBy.chosen !== null}
      className="max-w-72 print:hidden noscript:hidden"
      value={foundBy.chosen ?? ""}
      onChange={(event) => foundBy.narrow(event.currentTarget.value || null)}
      choices={[{ value: "", label: "Found by: any batch" }, ...foundBy.choices]}
    />
  );
}
