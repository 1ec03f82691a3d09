/** The process lives. Asks nothing else, so that a database that is away does not restart it. */
export function loader() {
  return new Response("ok\n", { headers: { "content-type": "text/plain; charset=utf-8" } });
}
