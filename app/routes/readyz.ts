import { isReady } from "~/services/health.server";

/** The database answers and its tables are up to date. */
export async function loader() {
  const ready = await isReady();
  return new Response(
    ready ? "ready\n" : "the database does not answer, or its tables are not up to date\n",
    {
      status: ready ? 200 : 503,
      headers: { "content-type": "text/plain; charset=utf-8" },
    },
  );
}
