import type { TestProject } from "vitest/node";
import { openThrowaway } from "../../scripts/database.mjs";

declare module "vitest" {
  interface ProvidedContext {
    databaseUrl: string;
  }
}

/** One throw-away database server for the whole run, unless TEST_DATABASE_URL names one (`npm test` has one already). */
export default async function setup(project: TestProject) {
  const given = process.env.TEST_DATABASE_URL;
  const database = given ? null : await openThrowaway((text: string) => console.log(text));
  project.provide("databaseUrl", given ?? database?.url ?? "");
  return () => database?.close();
}
