import { href } from "react-router";
import { CopyButton } from "~/components/ui/copy-button";
import { BlockHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { TextLink } from "~/components/ui/text-link";

/**
 * The methods paragraph of the distinct set shown, with its sources, and what in it a person assumed.
 *
 * @param props.lines the paragraph, then one line an assumption
 */
export function MethodsBlock({ lines }: { lines: readonly string[] }) {
  const [text = "", ...assumed] = lines;
  return (
    <section className="mt-9" aria-labelledby="methods-title">
      <BlockHead title="Methods text" id="methods-title">
        <CopyButton text={text}>Copy</CopyButton>
      </BlockHead>
      <p className="figures max-w-read text-pretty">{text}</p>
      {assumed.map((line) => (
        <Note key={line} className="mt-2">
          {line}
        </Note>
      ))}
      <p className="mt-2 text-xs text-ink-3">
        Written from the recipe and the counts, so it claims only what was done.{" "}
        <TextLink to={href("/methods")}>Formulas and sources</TextLink>
      </p>
    </section>
  );
}
