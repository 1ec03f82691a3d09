import { DomainError } from "../../lib/errors.ts";
import { readTyped } from "../../lib/format.ts";
import { scanComment } from "../../lib/intake/comment-numbers.ts";
import { unitOfName } from "../../lib/intake/energy-units.ts";
import { scanFields } from "../../lib/intake/field-energies.ts";
import { isSdfFrame } from "../../lib/sdf/frame.ts";
import { ENERGY_UNITS, kcalPer } from "../../lib/units.ts";
import type { XyzFrame } from "../../lib/xyz/frame.ts";
import type { OutsideData } from "./outside-data.ts";

export interface EnergyLevel {
  id: string;
  name: string;
  unit: string | null;
  /** "key:energy", "field:NAME", "number:2", or the name of a file. */
  origin: string | null;
}

export interface EnergyChoice {
  /** Id of a level; "auto" takes a number that stands where the ensemble's own do; "none" takes nothing. */
  level: string;
  /** As typed; empty: read from the file. */
  typed: string;
}

function refused(field: string, message: string): DomainError {
  return new DomainError("invalid", "The energy is not clear", message, { faults: [{ field, message }] });
}

/**
 * The energy that a structure from outside carries at a level of the ensemble, in that level's unit.
 *
 * @throws DomainError invalid, with the field at fault, where a level was named and no energy is found
 */
export function outsideEnergy(
  frame: XyzFrame,
  levels: readonly EnergyLevel[],
  choice: EnergyChoice,
): OutsideData["energy"] {
  if (choice.typed.trim() !== "" && /^(?:none|auto|)$/.test(choice.level)) {
    throw refused(
      "level",
      "An energy was typed: choose the level at which it was computed, or leave it out.",
    );
  }
  if (choice.level === "none") return null;
  if (choice.level === "auto" || choice.level === "") {
    for (const level of levels) {
      const found = /^(key|field):/.test(level.origin ?? "")
        ? numberAt(frame, level)
        : bareNumber(frame, level);
      if (found) return found;
    }
    return null;
  }
  const level = levels.find(({ id }) => id === choice.level);
  if (level === undefined) throw refused("level", "The ensemble has no such level.");
  if (choice.typed.trim() !== "") {
    const value = readTyped(choice.typed);
    if (value === null) {
      throw refused(
        "energy",
        `“${choice.typed.slice(0, 40)}” is no number. Type the energy in ${level.unit}.`,
      );
    }
    return { levelId: level.id, value, from: "typed" };
  }
  const found = numberAt(frame, level) ?? bareNumber(frame, level);
  if (found) return found;
  const where = isSdfFrame(frame) ? "data fields of the file have" : "comment line of the file has";
  throw refused(
    "energy",
    `The ${where} no energy where those of ${level.name} stand (${level.origin ?? "nowhere"}). Type it in ${level.unit}, or take the structure without an energy.`,
  );
}

function numberAt(frame: XyzFrame, level: EnergyLevel): OutsideData["energy"] {
  const rule = /^(key|field|number):(.+)$/s.exec(level.origin ?? "");
  if (rule === null) return null;
  const [, kind, name = ""] = rule;
  const scan = isSdfFrame(frame) ? scanFields(frame.fields) : scanComment(frame.comment);
  const number =
    kind === "number"
      ? isSdfFrame(frame)
        ? null
        : scan.numbers.find(({ position }) => String(position) === name)
      : scan.keyed.get(name)?.number;
  if (!number || number.value === null) return null;
  const value = inUnitOf(level, number.value, number.unit ?? unitOfName(name));
  return {
    levelId: level.id,
    value,
    from: kind === "number" ? `number:${name}` : `${isSdfFrame(frame) ? "field" : "key"}:${name}`,
  };
}

/** A comment that is one number and nothing else, where the ensemble's own are that. */
function bareNumber(frame: XyzFrame, level: EnergyLevel): OutsideData["energy"] {
  if (level.origin !== "number:1" || isSdfFrame(frame)) return null;
  const scan = scanComment(frame.comment);
  const number = scan.bare ? scan.numbers[0] : undefined;
  if (!number || number.value === null) return null;
  return { levelId: level.id, value: inUnitOf(level, number.value, number.unit), from: "number:1" };
}

function inUnitOf(level: EnergyLevel, value: number, unit: (typeof ENERGY_UNITS)[number] | null): number {
  const own = ENERGY_UNITS.find((one) => one === level.unit);
  return unit === null || own === undefined || own === unit ? value : (value * kcalPer(unit)) / kcalPer(own);
}
