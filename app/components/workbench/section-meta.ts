/** Title of a section in the browser's tab: "Populations · N-Butyl-tosylamide · Lowlying". */
export function sectionMeta(
  section: string,
  matches: readonly ({ id: string; loaderData?: unknown } | undefined)[],
): { title: string }[] {
  const layout = matches.find((match) => match?.id === "routes/workbench/layout")?.loaderData;
  const name = (layout as { ensemble?: { name?: string } } | undefined)?.ensemble?.name;
  return [{ title: [section, name, "Lowlying"].filter(Boolean).join(" · ") }];
}
