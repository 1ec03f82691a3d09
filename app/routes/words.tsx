import { wordSections } from "~/components/help/word-sections";
import { AppShell } from "~/components/layout/app-shell";
import { ReferencePage } from "~/components/layout/reference-page";
import type { Route } from "./+types/words";

export const meta: Route.MetaFunction = () => [
  { title: "Words and keys · Lowlying" },
  { name: "description", content: "What each word means here, and what each key does." },
];

export default function Page() {
  return (
    <AppShell>
      <ReferencePage
        title="Words and keys"
        lead="One word for one thing, on every page, in every file and in every call."
        sections={wordSections()}
      />
    </AppShell>
  );
}
