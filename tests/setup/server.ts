import type { TestProject } from "vitest/node";
import { openThrowaway } from "../../scripts/database.mjs";

declare module "vitest" {
  interface ProvidedContext {
    /** As the application comes to it: rows and nothing else. */
    databaseUrl: string;
    /** As who owns its tables does. */
    ownerUrl: string;
  }
}

/** One throw-away database server for the whole run, unless TEST_DATABASE_URL (and TEST_DATABASE_OWNER_URL) name one. */
export default async function setup(project: TestProject) {
  const given = process.env.TEST_DATABASE_URL;
  const database = given ? null : await openThrowaway((text: string) => console.log(text));
  project.provide("databaseUrl", given ?? database?.url ?? "");
  project.provide("ownerUrl", process.env.TEST_DATABASE_OWNER_URL ?? given ?? database?.ownerUrl ?? "");
  return () => database?.close();
}
