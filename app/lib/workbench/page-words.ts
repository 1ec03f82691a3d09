/** Names of a request's fields as a program reads them, and what the same is called on a page. */
const PAGE_WORDS: readonly (readonly [RegExp, string])[] = [
  [
    /name it with energyFrom and read the files again/g,
    "choose it under “Read again with other answers” below",
  ],
  [
    /Check energyFrom: names of keys and data fields are exact in case/g,
    "Choose another one: names of keys and data fields are exact in case",
  ],
  [/(?:Name|name) it with energyFrom, or send energyFrom=none/g, "Choose it, or say “none”"],
  [/name another number with energyFrom/g, "choose another number"],
  [/name it with energyFrom/g, "choose it as the energy"],
  [/send energyFrom=none/g, "choose “none” as the energy"],
  [/State energyUnit:/g, "State the unit of the energies:"],
  [/state one of these in energyUnit/g, "choose one of these as the unit"],
  [/ \(POST \/api\/v1\/ensembles\/\w+\/reread\)/g, ""],
  [/energyKind=(\w+)/g, "the kind “$1”"],
  [/energyFrom/g, "the number that is the energy"],
  [/energyUnit/g, "the unit of the energies"],
  [/energyKind/g, "the kind of the energies"],
  [/energyTemperature/g, "the temperature of the energies"],
];

/**
 * A message that a program gets with the names of its fields, in the words of the page.
 *
 * @example inPageWords("State energyUnit: hartree or eV.") // "State the unit of the energies: hartree or eV."
 */
export function inPageWords(text: string): string {
  return PAGE_WORDS.reduce((words, [name, plain]) => words.replace(name, plain), text);
}
