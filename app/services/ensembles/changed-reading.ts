import { DomainError } from "../../lib/errors.ts";
import { readAskId } from "../../lib/intake/reading-questions.ts";
import type { IntakeQuestion } from "../../lib/intake/report.ts";

/** The option that opens an answered question again. */
export const ASK_AGAIN = "ask";

export interface GivenAnswer {
  id: string;
  option: string;
}

/** What a request to read again changes of the answers about the reading of the files. */
export interface ChangedReading {
  /** Questions whose answer is another one now, in words for the logbook. */
  answered: { id: string; option: string; text: string; optionText: string }[];
  /** Batches of which something changes, from 0. */
  batches: number[];
  /** Whether the answer to the question is dropped. */
  opens(id: string): boolean;
  /** The choices of a batch with the changes in them. */
  apply(before: Record<string, string> | undefined, batch: number): Record<string, string> | undefined;
}

function invalid(message: string): DomainError {
  return new DomainError("invalid", "This is no answer", message, {
    faults: [{ field: "answers", message }],
  });
}

function checked(asked: readonly IntakeQuestion[], { id, option }: GivenAnswer): IntakeQuestion {
  const question = asked.find((one) => one.id === id);
  if (question === undefined) throw invalid(`Intake asked no question "${id}".`);
  if (readAskId(id) === null) {
    throw invalid(`"${id}" is about the energies: give level, energyUnit and energyFrom instead.`);
  }
  const options = [...question.options.map((one) => one.id), ASK_AGAIN];
  if (!options.includes(option)) {
    const there = options.map((one) => `"${one}"`).join(", ");
    throw invalid(`"${option}" is no option of the question "${id}". Options: ${there}.`);
  }
  return question;
}

/**
 * Sorts new answers to questions that intake asked of the files. Those that say what is in force change nothing. With
 * another molecule the configuration is open again, since its answer names a frame of the former one.
 *
 * @throws DomainError invalid for an unknown question or option, and for two options of one question
 */
export function changedReading(
  asked: readonly IntakeQuestion[],
  given: readonly GivenAnswer[],
): ChangedReading {
  const changes = new Map<string, string>();
  const answered: ChangedReading["answered"] = [];
  for (const { id, option } of given) {
    const question = checked(asked, { id, option });
    if ((changes.get(id) ?? option) !== option)
      throw invalid(`The question "${id}" has two options. Send one.`);
    if (option === (question.answered ?? ASK_AGAIN) || changes.has(id)) continue;
    changes.set(id, option);
    if (option === ASK_AGAIN) continue;
    const optionText = question.options.find((one) => one.id === option)?.text ?? option;
    answered.push({ id, option, text: question.text, optionText });
  }
  if (changes.has("group")) changes.set("configuration", ASK_AGAIN);
  return {
    answered: answered.filter(({ id }) => changes.get(id) !== ASK_AGAIN),
    batches: [...new Set([...changes.keys()].map((id) => readAskId(id)?.batch ?? 0))],
    opens: (id) => changes.get(id) === ASK_AGAIN,
    apply(before, batch) {
      const choices = { ...before };
      for (const [id, option] of changes) {
        const place = readAskId(id);
        if (place?.batch !== batch) continue;
        if (option === ASK_AGAIN) delete choices[place.ask];
        else choices[place.ask] = option;
      }
      return before === undefined && Object.keys(choices).length === 0 ? undefined : choices;
    },
  };
}
