import { COMMON_PASSWORDS } from "./common-passwords.server.ts";

export const PASSWORD_LEAST = 12;
export const PASSWORD_MOST = 128;

const PRODUCT = "lowlying";

/** Rows of the keyboard and of the alphabet, both ways, as people walk them. */
const WALKS = [
  "abcdefghijklmnopqrstuvwxyz",
  "qwertyuiopasdfghjklzxcvbnm",
  "qazwsxedcrfvtgbyhnujmikolp",
  "0123456789",
]
  .flatMap((walk) => [walk, [...walk].reverse().join("")])
  .map((walk) => walk.repeat(6));

/** One short piece over and over: "abcabcabcabc", "passwordpassword". */
function repeatsItself(text: string): boolean {
  for (let size = 1; size <= text.length / 2; size++) {
    const piece = text.slice(0, size);
    if (piece.repeat(Math.ceil(text.length / size)).slice(0, text.length) === text) return true;
  }
  return false;
}

function isProductName(text: string): boolean {
  const rest = text.replaceAll(PRODUCT, "");
  return rest !== text && !/\p{L}{4}/u.test(rest);
}

/**
 * What speaks against a password, in words for its user; null when nothing does. No rules of composition: length and
 * not being the first guess are what helps.
 *
 * @example passwordFault("short", "me@lab.example") // "5 characters. At least 12 are needed; a sentence is fine."
 */
export function passwordFault(password: string, email: string): string | null {
  const length = [...password].length;
  if (length < PASSWORD_LEAST) {
    return `${length} characters. At least ${PASSWORD_LEAST} are needed; a sentence is fine.`;
  }
  if (length > PASSWORD_MOST) return `${length} characters. At most ${PASSWORD_MOST} are possible.`;
  const plain = password.toLowerCase();
  const bare = plain.replace(/[^\p{L}\p{N}]/gu, "");
  const local = email.toLowerCase().split("@", 1)[0] ?? "";
  if (plain === email.toLowerCase() || (local.length >= PASSWORD_LEAST && bare === local)) {
    return "This is your own address. Choose something that others do not know.";
  }
  const guessed =
    COMMON_PASSWORDS.has(plain) ||
    COMMON_PASSWORDS.has(bare) ||
    isProductName(plain) ||
    repeatsItself(plain) ||
    WALKS.some((walk) => walk.includes(plain));
  return guessed
    ? "This is among the first passwords that anybody tries. Choose another, such as a sentence."
    : null;
}
