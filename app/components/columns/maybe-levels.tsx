import { href, useLocation } from "react-router";
import { TextLink } from "~/components/ui/text-link";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { joinWords } from "~/lib/workbench/findings";

const NAMED = 3;

/** Properties that are probably energies, by name, and the page where they become levels; nothing where there are none. */
export function MaybeLevels({ className = "" }: { className?: string }) {
  const { ensemble } = useWorkbench();
  const { search } = useLocation();
  const { maybeLevels: names } = ensemble;
  if (names.length === 0) return null;
  const one = names.length === 1;
  const rest = names.length - NAMED;
  const named = [...names.slice(0, NAMED).map((name) => `“${name}”`), ...(rest > 0 ? [`${rest} more`] : [])];
  return (
    <p className={className}>
      {joinWords(named)} {one ? "is a property here and looks" : "are properties here and look"} like
      energies.{" "}
      <TextLink to={{ pathname: href("/ensembles/:id/columns", { id: ensemble.id }), search }}>
        {ensemble.mayCompute ? `Use ${one ? "it as a level" : "them as levels"} at Columns` : "See Columns"}
      </TextLink>
    </p>
  );
}
