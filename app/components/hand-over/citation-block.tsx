import { useState } from "react";
import { CopyButton } from "~/components/ui/copy-button";
import { BlockHead } from "~/components/ui/finding";
import { Segments } from "~/components/ui/segments";
import { type CitationInput, citationBibtex, citationCff, citationText } from "~/lib/edition/citation";

type Form = "text" | "bibtex" | "cff";

const WRITE: Record<Form, (input: CitationInput) => string> = {
  text: citationText,
  bibtex: citationBibtex,
  cff: citationCff,
};

/** How to cite an edition: as text, as BibTeX, as a CFF file. */
export function CitationBlock({ input }: { input: CitationInput }) {
  const [form, setForm] = useState<Form>("text");
  const text = WRITE[form](input);
  return (
    <section className="mt-8 min-w-0" aria-labelledby="citation-title">
      <BlockHead title="Citation" id="citation-title">
        <Segments
          label="Form of the citation"
          hideLabel
          size="sm"
          value={form}
          onChange={setForm}
          options={[
            { value: "text", label: "Text" },
            { value: "bibtex", label: "BibTeX" },
            { value: "cff", label: "CFF" },
          ]}
        />
      </BlockHead>
      {form === "text" ? (
        <p className="figures break-words [overflow-wrap:anywhere]">{text}</p>
      ) : (
        <pre className="overflow-x-auto rounded-sm bg-sunk px-4 py-3 text-xs whitespace-pre-wrap [overflow-wrap:anywhere]">
          <code>{text}</code>
        </pre>
      )}
      <p className="mt-2">
        <CopyButton as="link" text={text}>
          Copy
        </CopyButton>
      </p>
    </section>
  );
}
