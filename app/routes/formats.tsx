import { AppShell } from "~/components/layout/app-shell";
import { ReferencePage } from "~/components/layout/reference-page";
import { type FormatLimits, formatSections } from "~/components/reference/format-sections";
import { env } from "~/env.server";
import type { Route } from "./+types/formats";

export const meta: Route.MetaFunction = () => [
  { title: "What the readers accept · Lowlying" },
  { name: "description", content: "Formats, limits, and what is held back, with the reason." },
];

export function loader(): FormatLimits {
  const { MAX_FILE_BYTES, MAX_FRAMES, MAX_ATOMS, MAX_COLUMNS, TEAM_QUOTA_BYTES, APP_ORIGIN } = env();
  return {
    fileBytes: MAX_FILE_BYTES,
    frames: MAX_FRAMES,
    atoms: MAX_ATOMS,
    columns: MAX_COLUMNS,
    teamBytes: TEAM_QUOTA_BYTES,
    origin: APP_ORIGIN,
  };
}

export default function Page({ loaderData }: Route.ComponentProps) {
  return (
    <AppShell>
      <ReferencePage
        title="What the readers accept"
        lead="Every frame that is seen ends accepted, accepted with a remark, or held, and the intake report accounts for all of them."
        sections={formatSections(loaderData)}
      />
    </AppShell>
  );
}
