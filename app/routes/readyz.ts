import { notReadyBecause } from "~/services/health.server";

/** The database answers, its tables are up to date, the disk has room, and jobs are worked on. No figures: anybody reads it. */
export async function loader() {
  const why = await notReadyBecause();
  return new Response(`${why ?? "ready"}\n`, {
    status: why === null ? 200 : 503,
    headers: { "content-type": "text/plain; charset=utf-8" },
  });
}
