import { href } from "react-router";
import { LogbookFilters } from "~/components/logbook/logbook-filters";
import { logbookFinding } from "~/components/logbook/logbook-finding";
import { LogbookList } from "~/components/logbook/logbook-list";
import { RemarkForm } from "~/components/logbook/remark-form";
import { Finding, SectionHead } from "~/components/ui/finding";
import { TextLink } from "~/components/ui/text-link";
import { hidesSomething, type LogbookFilter } from "~/lib/logbook/filter";
import type { LogbookPage } from "~/services/logbook/load-logbook.server";
import { useWorkbench } from "./workbench-context";

/** Who did and decided what, by day, newest first. */
export function LogbookSection({
  page,
  filter,
  search,
}: {
  page: LogbookPage;
  filter: LogbookFilter;
  /** Of the address: the same filters for the CSV. */
  search: string;
}) {
  const { ensemble } = useWorkbench();
  return (
    <section aria-labelledby="section-title">
      <SectionHead
        id="section-title"
        title="Logbook"
        aside={
          ensemble.role === "guest" ? null : (
            <TextLink to={href("/teams/:team/logbook", { team: ensemble.team.id })}>
              Of the whole team
            </TextLink>
          )
        }
      />
      <Finding more="Nothing in it can be changed or removed. Times are UTC.">
        {logbookFinding(page.rows, page.older, hidesSomething(filter))}
      </Finding>
      {ensemble.role === "guest" ? null : (
        <div className="mt-5">
          <LogbookFilters
            filter={filter}
            people={page.people}
            csv={`${href("/files/ensembles/:id/logbook.csv", { id: ensemble.id })}${search}`}
          />
          {page.mayRemark ? <RemarkForm /> : null}
        </div>
      )}
      <LogbookList rows={page.rows} older={page.older} total={page.total} />
    </section>
  );
}
