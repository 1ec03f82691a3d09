import { defineConfig } from "drizzle-kit";

export default defineConfig({
  dialect: "mysql",
  schema: "./app/db/schema.server.ts",
  out: "./drizzle",
  casing: "snake_case",
});
