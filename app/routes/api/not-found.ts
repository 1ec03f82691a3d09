import { forApi, notFound } from "~/services/http.server";

function nothingHere(): Promise<Response> {
  return forApi("", async () => {
    throw notFound();
  });
}

export const loader = nothingHere;
export const action = nothingHere;
