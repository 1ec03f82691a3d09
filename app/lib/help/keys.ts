/** Keys that do something in one kind of place. */
export interface KeyGroup {
  title: string;
  /** What must stand on a page for the keys to do anything, as a selector; null: they do on every page. */
  where: string | null;
  keys: readonly { keys: readonly string[]; does: string }[];
}

/** What the keyboard does, by where the focus is. No key but `?` acts without a focus of its own. */
export const KEY_GROUPS: readonly KeyGroup[] = [
  {
    title: "Everywhere",
    where: null,
    keys: [
      { keys: ["Tab", "Shift Tab"], does: "to the next or the last control" },
      { keys: ["Enter"], does: "follow a link, press a button, take what was typed" },
      { keys: ["Space"], does: "press a button, tick a box" },
      { keys: ["Escape"], does: "close a dialog, a menu or an explanation; put a field back" },
      { keys: ["?"], does: "open this list" },
    ],
  },
  {
    title: "Table of conformers",
    where: "[role=grid]",
    keys: [
      { keys: ["↑", "↓"], does: "the row above or below" },
      { keys: ["Page up", "Page down"], does: "a page of rows up or down" },
      { keys: ["Home", "End"], does: "the first or the last row" },
      { keys: ["Space", "Enter"], does: "select the row alone" },
      { keys: ["Shift ↑", "Shift ↓"], does: "extend the selection" },
      { keys: ["Ctrl Space"], does: "add the row to the selection, or take it out" },
    ],
  },
  {
    title: "Rows that open",
    where: "[role=grid] [aria-expanded]",
    keys: [{ keys: ["right arrow", "left arrow"], does: "open or close the row" }],
  },
  {
    title: "3D view",
    where: "[role=application]",
    keys: [
      { keys: ["arrow keys"], does: "turn; with Shift by a quarter as much" },
      { keys: ["+", "−"], does: "nearer, farther" },
      { keys: ["0", "Home"], does: "back to the first view" },
    ],
  },
  {
    title: "Charts",
    where: "svg [tabindex='0']",
    keys: [
      { keys: ["arrow keys"], does: "from point to point; the line below reads the value" },
      { keys: ["Home", "End"], does: "the first or the last point" },
      { keys: ["Enter", "Space"], does: "select the conformer of the point" },
    ],
  },
  {
    title: "Sliders",
    where: "input[type=range]",
    keys: [
      { keys: ["arrow keys"], does: "one step" },
      { keys: ["Page up", "Page down"], does: "ten steps" },
      { keys: ["Home", "End"], does: "the least or the greatest value" },
    ],
  },
  {
    title: "Fields with a number",
    where: "input[inputmode=decimal]",
    keys: [
      { keys: ["↑", "↓"], does: "one step up or down" },
      { keys: ["Page up", "Page down"], does: "ten steps up or down" },
      { keys: ["Enter"], does: "take the number" },
      { keys: ["Escape"], does: "put the last number back" },
    ],
  },
];

/**
 * The groups in force on a page.
 *
 * @param has says whether a selector finds something there
 * @example keysInForce(() => false).map(({ title }) => title) // ["Everywhere"]
 */
export function keysInForce(has: (selector: string) => boolean): KeyGroup[] {
  return KEY_GROUPS.filter(({ where }) => where === null || has(where));
}

/** Name and value of the cookie that switches `?` off. */
export const KEYS_COOKIE = "keys";
export const KEYS_OFF = "off";

/**
 * Whether `?` opens the list, by the cookies of the page.
 *
 * @example keysAreOn("theme=dark; keys=off") // false
 */
export function keysAreOn(cookies: string): boolean {
  return !cookies.split(/;\s*/).includes(`${KEYS_COOKIE}=${KEYS_OFF}`);
}
