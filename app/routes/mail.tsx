import { AppShell, pageClass } from "~/components/layout/app-shell";
import type { ShellHandle } from "~/components/layout/breadcrumbs";
import { Finding } from "~/components/ui/finding";
import { StatePanel } from "~/components/ui/state-panel";
import { linkClass } from "~/components/ui/text-link";
import { requestIdContext } from "~/context";
import { formatMoment, pluralWord } from "~/lib/format";
import { forPage } from "~/services/http.server";
import { readLocalMail } from "~/services/mail/read-local.server";
import type { Route } from "./+types/mail";

export const meta: Route.MetaFunction = () => [{ title: "Letters kept here · Lowlying" }];

export const handle: ShellHandle = { crumbs: () => [{ label: "Letters" }] };

export async function loader({ context }: Route.LoaderArgs) {
  const letters = await forPage(context.get(requestIdContext), readLocalMail);
  return { letters, now: new Date().toISOString() };
}

/** The letters of the local fake: there is no mail server, so nothing leaves this machine. */
export default function Page({ loaderData }: Route.ComponentProps) {
  const { letters, now } = loaderData;
  return (
    <AppShell>
      <div className={`pt-8 pb-16 max-sm:pt-4 ${pageClass}`}>
        <h1 className="text-lg font-semibold tracking-title sm:text-xl">Letters kept here</h1>
        <Finding wide>
          No mail server is set, so letters stay on this machine
          {letters.length === 0
            ? "."
            : letters.length === 1
              ? "; there is one."
              : `; ${pluralWord(letters.length, "letter")}, newest first.`}
        </Finding>
        <div className="mt-9 grid max-w-[46rem] gap-8">
          {letters.length === 0 ? (
            <StatePanel title="No letters yet">
              Ask for a password reset or invite somebody: the letter appears here within seconds.
            </StatePanel>
          ) : null}
          {letters.map((letter) => (
            <article key={letter.id} className="border-t border-rule pt-4">
              <h2 className="text-base font-semibold">{letter.subject}</h2>
              <p className="text-xs break-all text-ink-3">
                to {letter.recipient} · {letter.at === "" ? "" : formatMoment(letter.at, now)}
              </p>
              <div className="mt-3 grid gap-3 break-words">
                {letter.body.split(/\n{2,}/).map((paragraph) => (
                  <p key={paragraph}>
                    {paragraph.split("\n").map((line) => (
                      <Line key={line} text={line} />
                    ))}
                  </p>
                ))}
              </div>
            </article>
          ))}
        </div>
      </div>
    </AppShell>
  );
}

function Line({ text }: { text: string }) {
  return (
    <span className="block">
      {/^https?:\/\/\S+$/.test(text) ? (
        <a href={text} className={`${linkClass} break-all`}>
          {text}
        </a>
      ) : (
        text
      )}
    </span>
  );
}
