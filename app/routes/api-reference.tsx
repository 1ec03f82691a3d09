import { AppShell } from "~/components/layout/app-shell";
import { ReferencePage } from "~/components/layout/reference-page";
import { apiSections } from "~/components/reference/api-sections";
import { env } from "~/env.server";
import { describeCalls } from "~/lib/api/describe-calls";
import { openApiDocument } from "~/services/openapi.server";
import type { Route } from "./+types/api-reference";

export const meta: Route.MetaFunction = () => [
  { title: "The API · Lowlying" },
  { name: "description", content: "Every call, with programs to copy." },
];

export function loader() {
  const { APP_ORIGIN, API_CALLS_PER_MINUTE, API_UPLOADS_PER_MINUTE, ANONYMOUS_CALLS_PER_MINUTE } = env();
  return {
    calls: describeCalls(openApiDocument()),
    limits: {
      origin: APP_ORIGIN,
      calls: API_CALLS_PER_MINUTE,
      uploads: API_UPLOADS_PER_MINUTE,
      anonymous: ANONYMOUS_CALLS_PER_MINUTE,
    },
  };
}

export default function Page({ loaderData }: Route.ComponentProps) {
  return (
    <AppShell>
      <ReferencePage
        title="The API"
        lead="Send ensembles from a batch job, read results from a script: whatever the pages do with ensembles and sifts, a token can do too."
        sections={apiSections(loaderData.calls, loaderData.limits)}
      />
    </AppShell>
  );
}
