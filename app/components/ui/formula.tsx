import { formulaParts } from "~/lib/format";

/** A molecular formula with its counts set low. */
export function Formula({ children }: { children: string }) {
  return (
    <span className="whitespace-nowrap">
      {formulaParts(children).map((part, i) =>
        part.as === "sub" ? (
          <sub key={i}>{part.text}</sub>
        ) : part.as === "sup" ? (
          <sup key={i}>{part.text}</sup>
        ) : (
          <span key={i}>{part.text}</span>
        ),
      )}
    </span>
  );
}
