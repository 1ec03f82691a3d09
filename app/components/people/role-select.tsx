import { href, useFetcher } from "react-router";
import { FilterSelect } from "~/components/ui/select-field";
import type { PeopleAnswer } from "~/routes/team/people";
import type { MemberRow } from "~/services/people/list-people.server";
import { useAnswerToast } from "./use-answer-toast";

const CHOICES = [
  { value: "owner", label: "Owner" },
  { value: "analyst", label: "Analyst" },
  { value: "reader", label: "Reader" },
];

/** The role in the row: choosing another one acts at once. Without script a button sends it. */
export function RoleSelect({ team, member }: { team: string; member: MemberRow }) {
  const fetcher = useFetcher<PeopleAnswer>();
  useAnswerToast(fetcher.data, fetcher.state === "idle");
  if (member.lastOwner) return <span>Owner</span>;
  const asked = fetcher.formData?.get("role");
  return (
    <fetcher.Form
      method="post"
      action={href("/teams/:team/people", { team })}
      className="inline-flex items-center gap-2"
      onChange={(event) => void fetcher.submit(event.currentTarget)}
    >
      <input type="hidden" name="intent" value="role" />
      <input type="hidden" name="person" value={member.id} />
      <FilterSelect
        key={member.role}
        label={`Role of ${member.name}`}
        name="role"
        choices={CHOICES}
        active={false}
        defaultValue={typeof asked === "string" ? asked : member.role}
      />
      <noscript>
        <button type="submit" className="underline">
          Set
        </button>
      </noscript>
    </fetcher.Form>
  );
}
