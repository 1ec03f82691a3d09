import { href, Link } from "react-router";
import type { ReferenceSection } from "~/components/layout/reference-page";
import { linkClass } from "~/components/ui/text-link";
import { KEY_GROUPS } from "~/lib/help/keys";
import { WORD_GROUPS, type WordGroup, wordId } from "~/lib/help/words";
import { KeyList } from "./key-list";
import { KeySwitch } from "./key-switch";

/** The glossary group by group, then the keys. */
export function wordSections(): ReferenceSection[] {
  return [
    ...WORD_GROUPS.map((group) => ({ id: group.id, title: group.title, body: <Words group={group} /> })),
    { id: "keys", title: "Keys", body: <Keys /> },
  ];
}

function Words({ group }: { group: WordGroup }) {
  return (
    <dl className="grid gap-4">
      {group.words.map(({ word, means, method }) => (
        <div key={word} id={wordId(word)} className="grid gap-x-6 gap-y-1 sm:grid-cols-[11rem_minmax(0,1fr)]">
          <dt className="font-medium">{word}</dt>
          <dd className="text-ink-2">
            {means}{" "}
            {method === undefined ? null : (
              <Link
                className={`${linkClass} text-sm print:hidden`}
                to={`${href("/methods")}#${method}`}
                aria-label={`How ${word} is computed`}
              >
                How
              </Link>
            )}
          </dd>
        </div>
      ))}
    </dl>
  );
}

function Keys() {
  return (
    <>
      <p>
        Everything can be done from the keyboard. A key acts where the focus is; on a page{" "}
        <kbd className="font-sans font-medium">?</kbd> lists those that do something there.
      </p>
      <div className="print:hidden">
        <KeySwitch />
      </div>
      <KeyList groups={KEY_GROUPS} />
    </>
  );
}
