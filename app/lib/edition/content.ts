import { z } from "zod";
import { measuredPropertiesSchema, measuredRecordSchema } from "../averages/averaging.ts";
import { AVERAGE_RULES } from "../averages/rule.ts";
import { siftRecipeSchema } from "../recipe/recipe.ts";

/**
 * Everything that an edition shows, as plain data: what is stored as canonical JSON under its SHA-256, handed out as
 * `results.json`, and recomputed by "recompute and verify". It holds no ids, names or addresses of people: a guest may
 * read all of it.
 */

const sha256 = z.string().regex(/^[0-9a-f]{64}$/);
const finite = z.number();

const keptSchema = z.object({
  frame: z.number().int(),
  label: z.string().nullable(),
  /** As stored, in the unit of the level. */
  energy: finite.nullable(),
  relativeEnergy: finite.nullable(),
  degeneracy: z.number().int(),
  symmetryNumber: z.number().int().nullable(),
  copies: finite.nullable(),
  mirrorRmsd: finite,
  found: z.number().int(),
  upperBound: z.boolean().optional(),
  /** Largest distance between two heavy atoms, Å: how stretched the shape is. */
  extent: finite,
});

const droppedSchema = z.object({
  frame: z.number().int(),
  repeats: z.number().int(),
  rmsd: finite,
  energyDifference: finite.nullable(),
  mirror: z.boolean().optional(),
  upperBound: z.boolean().optional(),
});

const populationsSchema = z.object({
  temperature: finite,
  weights: z.enum(["copies", "degeneracy"]),
  weightsReason: z.string(),
  /** True where the person chose the weights instead of leaving them to the kind of energy. */
  weightsChosen: z.boolean(),
  /** In the order of `kept`. */
  values: z.array(z.object({ weight: finite, population: finite })),
  freeEnergy: finite,
  energy: finite,
  entropy: finite,
  heatCapacity: finite,
  effectiveCount: finite,
});

const columnSchema = z.object({
  name: z.string(),
  kind: z.enum(["energy", "property"]),
  unit: z.string().nullable(),
  rule: z.string().nullable(),
  /** In the order of `kept`; null where missing. */
  values: z.array(finite.nullable()),
  sha256,
  /** Per-atom properties, from content 2 on: the quantity they share and their atom, counted from 1. */
  quantity: z.string().nullable().optional(),
  atom: z.number().int().nullable().optional(),
});

/** One property over the distinct set, as `averages.csv` has it. */
const averageSchema = z.object({
  property: z.string(),
  unit: z.string().nullable(),
  rule: z.enum(AVERAGE_RULES),
  average: finite.nullable(),
  spread: finite.nullable(),
  covered: finite,
  /** What the error of the level makes of it, from content 2 on: standard deviation and 95 % range of the draws. */
  error: z.object({ sd: finite, low: finite.nullable(), high: finite.nullable() }).nullable().optional(),
});

/** How far the error of the level moves populations: Monte Carlo, fixed by its seed. */
const uncertaintySchema = z.object({
  /** kcal/mol, one standard deviation. */
  sigma: finite,
  /** Name of the level that the error was taken against; null where a person gave it or nobody did. */
  sigmaFrom: z.string().nullable(),
  seed: z.number().int(),
  draws: z.number().int(),
  averageDraws: z.number().int(),
  generator: z.string(),
  /** In the order of `kept`: 95 % of the draws lie from `low` to `high`; `lowest` is the share of draws with the lowest energy. */
  populations: z.array(
    z.object({ mean: finite, sd: finite, low: finite, median: finite, high: finite, lowest: finite }),
  ),
  lowestSet: z.array(z.number().int()),
});

/** The same energies at several temperatures. */
const temperaturesSchema = z.object({
  kelvin: z.array(finite),
  /** A list a temperature, in the order of `kept`. */
  populations: z.array(z.array(finite)),
  thermo: z.array(z.object({ freeEnergy: finite, energy: finite, entropy: finite, effectiveCount: finite })),
  /** A list a temperature, in the order of `averages`. */
  averages: z.array(z.array(finite.nullable())),
  /** What stands against other temperatures: free energies belong to one. */
  warning: z.string().nullable(),
});

/** What nobody had settled when the edition was frozen; `section` is where it can be. */
export const openItemSchema = z.object({
  code: z.string(),
  title: z.string(),
  text: z.string(),
  section: z.string().nullable(),
});
export type OpenItem = z.infer<typeof openItemSchema>;

/** The level of the sift against another one, on the conformers that have both energies. */
const comparisonSchema = z.object({
  reference: z.string(),
  n: z.number().int(),
  mad: finite,
  rmsd: finite,
  max: finite,
  spearman: finite.nullable(),
  populationOverlap: finite,
  /** Narrowest windows at the level that keep 90, 95 and 99 % of the reference population. */
  window: z.array(z.object({ share: finite, kcal: finite, count: z.number().int() })),
});

/** How complete the search is, from how often each conformer was found. */
const samplingSchema = z.object({
  hits: z.number().int(),
  once: z.number().int(),
  twice: z.number().int(),
  coverage: finite,
  /** Lower bound of the number of conformers. */
  atLeast: finite,
});

/** Several searches against each other: what each found of the distinct set, and what the first and the later ones share. */
const searchesSchema = z.object({
  each: z.array(
    z.object({
      name: z.string(),
      /** Numbers of its frames, both ends included; the frames of it that the sift compared. */
      ranges: z.array(z.tuple([z.number().int(), z.number().int()])),
      frames: z.number().int(),
      found: z.number().int(),
      coverage: finite.nullable(),
    }),
  ),
  /** Capture and recapture; null where either has no frame in the set. */
  pair: z
    .object({
      first: z.number().int(),
      second: z.number().int(),
      both: z.number().int(),
      estimate: finite,
    })
    .nullable(),
});

/** A sentence on what limits the results; "open" is for somebody to settle. */
export const editionFindingSchema = z.object({
  kind: z.enum(["open", "know"]),
  title: z.string(),
  text: z.string(),
});
export type EditionFinding = z.infer<typeof editionFindingSchema>;

/** How a structure from outside was compared: for the methods text; it takes no part in any result. */
const outsideSchema = z.object({
  name: z.string(),
  sha256,
  set: z.enum(["heavy", "heavy+polarH", "all"]),
  atoms: z.number().int(),
  conformers: z.number().int(),
  mirror: z.boolean(),
  strainLevel: z.string().nullable(),
});

const lineSchema = z.object({
  slope: finite,
  intercept: finite,
  n: z.number().int(),
  from: z.enum(["fitted", "typed"]),
});

const agreementSchema = z.object({
  n: z.number().int(),
  mae: finite,
  rmse: finite,
  max: finite,
  /** Computed = m measured + b, and the mean error once that is taken out; from five values on. */
  corrected: z.object({ m: finite, b: finite, mae: finite }).nullable(),
});

/** Averages of a per-atom quantity beside measured values; each nucleus by itself. Atoms count from 1. */
const measuredSchema = z.object({
  quantity: z.string(),
  unit: z.string().nullable(),
  /** True where shieldings are scaled to shifts before they are compared. */
  shieldings: z.boolean(),
  /** As people entered it. */
  stated: measuredRecordSchema.omit({ quantity: true }),
  nuclei: z.array(
    z.object({
      z: z.number().int(),
      line: lineSchema.nullable(),
      agreement: agreementSchema
        /** First atom of the group with the largest deviation. */
        .extend({ maxAt: z.number().int() })
        .nullable(),
      groups: z.array(
        z.object({
          atoms: z.array(z.number().int()),
          average: finite.nullable(),
          computed: finite.nullable(),
          error: finite.nullable(),
          /** As it is assigned. */
          measured: finite.nullable(),
          difference: finite.nullable(),
        }),
      ),
    }),
  ),
  /** Pairs that could be assigned either way: mean errors of the two, and of the whole nucleus, by either. */
  pairs: z.array(
    z.object({
      atoms: z.array(z.number().int()).length(2),
      z: z.number().int(),
      chosen: z.enum(["entered", "swapped"]),
      entered: z.object({ mae: finite, nucleusMae: finite }),
      swapped: z.object({ mae: finite, nucleusMae: finite }),
    }),
  ),
});

/** Averages of properties of the whole molecule beside measured values. */
const measuredFiguresSchema = z.object({
  /** As people entered it. */
  stated: measuredPropertiesSchema,
  /** Those that were measured, in the order of the averages. */
  rows: z.array(
    z.object({
      property: z.string(),
      unit: z.string().nullable(),
      average: finite.nullable(),
      error: finite.nullable(),
      measured: finite,
      difference: finite.nullable(),
    }),
  ),
  /** Judged together a unit; `maxAt` names the property with the largest deviation. */
  units: z.array(z.object({ unit: z.string(), agreement: agreementSchema.extend({ maxAt: z.string() }) })),
});

export const editionContentSchema = z.object({
  schema: z.literal("lowlying-edition"),
  /** 1 has no uncertainty, no further temperatures and no list of what was open. */
  version: z.union([z.literal(1), z.literal(2)]),
  caution: z.string(),
  constants: z.string(),
  units: z.record(z.string(), z.string().nullable()),
  /** Name of the team. */
  team: z.string(),
  ensemble: z.object({
    name: z.string(),
    formula: z.string(),
    atoms: z.number().int(),
    elements: z.array(z.number().int()),
    isotopes: z.array(z.number().int()).nullable(),
    atomLabels: z.array(z.string().nullable()).nullable(),
    bonds: z.array(z.number().int()),
    orders: z.object({
      orders: z.array(z.number()),
      charges: z.array(z.number()).nullable(),
      radicals: z.array(z.number()).nullable(),
      origin: z.enum(["file", "perceived", "unknown"]),
    }),
    charge: z.object({ value: z.number().int(), origin: z.enum(["file", "perceived"]) }),
    multiplicity: z.object({ value: z.number().int(), origin: z.enum(["file", "assumed"]) }),
    chirality: z.enum(["achiral", "chiral", "unsure"]),
    frames: z.number().int(),
    accepted: z.number().int(),
    remarked: z.number().int(),
    held: z.number().int(),
    openQuestions: z.number().int(),
  }),
  inputs: z.object({
    files: z.array(
      z.object({
        name: z.string(),
        format: z.string(),
        sha256,
        bytes: z.number().int(),
        firstFrame: z.number().int(),
        frames: z.number().int(),
      }),
    ),
    /** Over elements, bonds, numbers and coordinates of the frames that took part. */
    framesSha256: sha256,
  }),
  level: z
    .object({
      name: z.string(),
      unit: z.string(),
      energyKind: z.enum(["electronic", "zero-point", "enthalpy", "free"]),
      temperature: finite.nullable(),
      /** False while the energies are only taken as electronic because nobody said. */
      kindStated: z.boolean(),
      ordinal: z.number().int(),
    })
    .nullable(),
  /** Without the level's id: its name and its column's checksum say which. */
  recipe: siftRecipeSchema.omit({ level: true }),
  kept: z.array(keptSchema),
  dropped: z.array(droppedSchema),
  held: z.array(z.object({ frame: z.number().int(), reason: z.string() })),
  outsideWindow: z.array(z.number().int()),
  withoutEnergy: z.array(z.number().int()),
  pairsExamined: z.number().int(),
  populations: populationsSchema.nullable(),
  columns: z.array(columnSchema),
  averages: z.array(averageSchema).nullable().default(null),
  comparisons: z.array(comparisonSchema).default([]),
  sampling: samplingSchema.nullable().default(null),
  /** Absent where all frames are of one search. */
  searches: searchesSchema.optional(),
  /** Absent where none lies beside the ensemble. */
  outside: z.array(outsideSchema).optional(),
  /** Groups of equivalent atoms taken apart by hand, atoms from 1; absent where none is. */
  splits: z.array(z.array(z.array(z.number().int()))).optional(),
  /** Absent where nothing was measured. */
  measured: z.array(measuredSchema).optional(),
  measuredProperties: measuredFiguresSchema.optional(),
  uncertainty: uncertaintySchema.nullable().default(null),
  temperatures: temperaturesSchema.nullable().default(null),
  open: z.array(openItemSchema).default([]),
  words: z.object({ summary: z.array(z.string()), methods: z.string() }),
  findings: z.array(editionFindingSchema),
});

export type EditionContent = z.infer<typeof editionContentSchema>;
export type EditionKept = EditionContent["kept"][number];
export type EditionPopulations = NonNullable<EditionContent["populations"]>;

/** One file handed out with an edition. */
export const editionFileSchema = z.object({ name: z.string(), bytes: z.number().int(), sha256 });
export type EditionFile = z.infer<typeof editionFileSchema>;

/** What an edition was frozen from: enough to find everything again and to compute it anew. Never shown to guests. */
export const editionRecipeSchema = z.object({
  sift: z.string(),
  recipe: siftRecipeSchema,
  temperature: finite,
  weights: z.enum(["auto", "copies", "degeneracy"]),
  /** Ids of the columns shown, in the order of the content. */
  columns: z.array(z.string()),
  /** Error of the level, kcal/mol; null draws nothing, as in editions of content 1. */
  sigma: finite.nullable().default(null),
  /** Name of the level that the error was taken against. */
  sigmaFrom: z.string().nullable().default(null),
  seed: z.number().int().default(0),
  /** K, shown beside the one that the populations are taken at. */
  temperatures: z.array(finite).default([]),
  /** What changed since the edition before, in words. */
  changed: z.array(z.string()).default([]),
});
export type EditionRecipe = z.infer<typeof editionRecipeSchema>;

export const editionInputsSchema = z.object({
  files: z.array(z.object({ position: z.number().int(), name: z.string(), sha256 })),
  frames: sha256,
  columns: z.array(z.object({ id: z.string(), name: z.string(), sha256 })),
});
export type EditionInputs = z.infer<typeof editionInputsSchema>;
