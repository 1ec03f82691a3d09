import type { KeyGroup } from "~/lib/help/keys";

/** Groups of keys, each with what they do. */
export function KeyList({ groups, level = "h3" }: { groups: readonly KeyGroup[]; level?: "h2" | "h3" }) {
  const Title = level;
  return (
    <div className="grid gap-5 text-sm">
      {groups.map((group) => (
        <section key={group.title}>
          <Title className="text-sm font-semibold">{group.title}</Title>
          <dl className="mt-1">
            {group.keys.map(({ keys, does }) => (
              <div
                key={keys.join(" ")}
                className="grid grid-cols-[11rem_minmax(0,1fr)] gap-x-4 border-t border-rule py-1.5 max-sm:grid-cols-[8rem_minmax(0,1fr)]"
              >
                <dt className="flex flex-wrap content-start gap-1">
                  {keys.map((key) => (
                    <kbd
                      key={key}
                      className="rounded-sm border border-rule-2 px-1.5 font-sans text-xs/[1.125rem] text-ink-2"
                    >
                      {key}
                    </kbd>
                  ))}
                </dt>
                <dd className="text-ink-2">{does}</dd>
              </div>
            ))}
          </dl>
        </section>
      ))}
    </div>
  );
}
