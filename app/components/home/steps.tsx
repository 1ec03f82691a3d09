const STEPS = [
  {
    title: "Take in",
    text: "XYZ and SDF files as they are. Every frame is accepted, remarked or held, with the reason; energy and unit are confirmed, never guessed.",
  },
  { title: "Sift", text: "Exact, symmetry-corrected RMSD. Each dropped frame names whom it repeats." },
  {
    title: "Weigh",
    text: "Populations, free energy and entropy at your temperature, mirror images and symmetry counted.",
  },
  { title: "Judge", text: "Two levels on the same structures, and the window that keeps 95\u00a0%." },
  { title: "Average", text: "Couplings, distances, shifts: each with its rule and its uncertainty." },
  { title: "Trust", text: "How complete the sampling is, and what the error of the level does." },
  {
    title: "Hand over",
    text: "XYZ, SDF, CSV and JSON, editions behind a link that ends; all of it by API too.",
  },
] as const;

/** The seven steps that the product takes today. */
export function Steps() {
  return (
    <section aria-labelledby="steps" className="mt-16 border-t border-rule-2 pt-8">
      <h2 id="steps" className="text-lg font-semibold tracking-title sm:text-xl">
        From files to an answer, in the open
      </h2>
      <ol className="mt-4 grid gap-x-8 gap-y-6 sm:grid-cols-2 lg:grid-cols-4">
        {STEPS.map((step, i) => (
          <li key={step.title} className="grid grid-cols-[1.5rem_minmax(0,1fr)]">
            <span aria-hidden="true" className="figures font-medium text-ink-3">
              {i + 1}
            </span>
            <div>
              <h3 className="font-semibold">{step.title}</h3>
              <p className="mt-1 text-pretty text-ink-2">{step.text}</p>
            </div>
          </li>
        ))}
      </ol>
    </section>
  );
}
