import { index, type RouteConfig, route } from "@react-router/dev/routes";

/** Every address of the product. Each file's service call names verb and object; the access test walks this table. */
export default [
  index("routes/home.tsx"),
  route("methods", "routes/methods.tsx"),
  route("formats", "routes/formats.tsx"),
  route("api", "routes/api-reference.tsx"),
  route("theme", "routes/theme.ts"),

  route("login", "routes/auth/login.tsx"),
  route("logout", "routes/auth/logout.ts"),
  route("sign-up", "routes/auth/sign-up.tsx"),
  route("reset-password", "routes/auth/forgot-password.tsx"),
  route("reset-password/:secret", "routes/auth/reset-password.tsx"),
  route("invitation/:secret", "routes/auth/invitation.tsx"),
  route("confirm-address/:secret", "routes/auth/confirm-address.tsx"),
  route("restore-account/:secret", "routes/auth/restore-account.tsx"),
  route("account", "routes/account.tsx"),
  route("mail", "routes/mail.tsx"),

  route("teams", "routes/team/index.ts"),
  route("teams/:team", "routes/team/layout.tsx", [
    index("routes/team/series.tsx"),
    route("people", "routes/team/people.tsx"),
    route("tokens", "routes/team/tokens.tsx"),
  ]),

  route("ensembles/:id", "routes/workbench/layout.tsx", [
    index("routes/workbench/index.ts"),
    route("intake", "routes/workbench/intake.tsx"),
    route("distinct-set", "routes/workbench/distinct-set.tsx"),
    route("compare", "routes/workbench/compare.tsx"),
    route("populations", "routes/workbench/populations.tsx"),
    route("levels", "routes/workbench/levels.tsx"),
    route("plan", "routes/workbench/plan.tsx"),
    route("averages", "routes/workbench/averages.tsx"),
    route("trust", "routes/workbench/trust.tsx"),
    route("hand-over", "routes/workbench/hand-over.tsx"),
    route("logbook", "routes/workbench/logbook.tsx"),
  ]),

  route("ensembles/:id/editions/:number", "routes/editions/edition.tsx"),
  route("files/ensembles/:id/editions/:number/files/:name", "routes/editions/file.ts"),
  route("files/ensembles/:id/editions/:number/positions", "routes/editions/positions.ts"),

  route("e/:token", "routes/share/edition.tsx"),
  route("e/:token/files/:name", "routes/share/file.ts"),
  route("e/:token/sources/:position", "routes/share/source.ts"),
  route("e/:token/positions", "routes/share/positions.ts"),

  route("files/upload", "routes/files/upload.ts"),
  route("files/ensembles/:id/files", "routes/files/append.ts"),
  route("files/ensembles/:id/coordinates", "routes/files/coordinates.ts"),
  route("files/ensembles/:id/accepted", "routes/files/accepted.ts"),
  route("files/ensembles/:id/sources/:position", "routes/files/source.ts"),
  route("files/ensembles/:id/columns", "routes/files/columns.ts"),
  route("files/ensembles/:id/sifts", "routes/files/new-sift.ts"),
  route("files/sifts/:id", "routes/files/sift.ts"),
  route("files/sifts/:id/export.xyz", "routes/files/export-xyz.ts"),
  route("files/sifts/:id/export.sdf", "routes/files/export-sdf.ts"),
  route("files/sifts/:id/export.csv", "routes/files/export-csv.ts"),
  route("files/sifts/:id/export.json", "routes/files/export-json.ts"),
  route("files/sifts/:id/averages.csv", "routes/files/averages-csv.ts"),

  route("healthz", "routes/healthz.ts"),
  route("readyz", "routes/readyz.ts"),

  route("api/v1", "routes/api/layout.ts", [
    route("openapi.json", "routes/api/openapi.ts"),
    route("ensembles", "routes/api/ensembles.ts"),
    route("ensembles/:id", "routes/api/ensemble.ts"),
    route("ensembles/:id/files", "routes/api/files.ts"),
    route("ensembles/:id/answers", "routes/api/answers.ts"),
    route("ensembles/:id/reread", "routes/api/reread.ts"),
    route("ensembles/:id/frames/:frame/release", "routes/api/release.ts"),
    route("ensembles/:id/frames/:frame/hold", "routes/api/hold.ts"),
    route("ensembles/:id/columns", "routes/api/columns.ts"),
    route("ensembles/:id/sifts", "routes/api/sifts.ts"),
    route("sifts/:id", "routes/api/sift.ts"),
    route("sifts/:id/populations", "routes/api/populations.ts"),
    route("sifts/:id/export.xyz", "routes/api/export-xyz.ts"),
    route("sifts/:id/export.sdf", "routes/api/export-sdf.ts"),
    route("sifts/:id/export.csv", "routes/api/export-csv.ts"),
    route("sifts/:id/export.json", "routes/api/export-json.ts"),
    route("sifts/:id/averages.csv", "routes/api/averages-csv.ts"),
    route("*", "routes/api/not-found.ts"),
  ]),

  // Last: the root middleware only runs where a route matches, and the not-found page needs its headers too.
  route("*", "routes/not-found.tsx"),
] satisfies RouteConfig;
