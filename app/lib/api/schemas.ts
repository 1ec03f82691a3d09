import { z } from "zod";
import { siftRecipeSchema } from "../recipe/recipe.ts";
import { STANDARD_TEMPERATURE_K } from "../units.ts";

/**
 * Every request and answer of the API as one set of schemas: they validate, and openapi.json is made from them.
 * Energies are kcal/mol (but for `energyUnit` and a level's own `unit`), lengths Å, temperatures K; frames count from 1.
 */

const id = z.string().regex(/^[a-z2-7]{16}$/);
const frameNumber = z.number().int().positive();

/** A number in an address or a form field, the whole text and nothing else. */
const NUMBER_TEXT = /^[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d+)?$/;

function numberText(lowest: number, highest: number, words: string) {
  return z
    .string()
    .refine((text) => NUMBER_TEXT.test(text) && Number(text) >= lowest && Number(text) <= highest, words)
    .transform(Number);
}

const TEMPERATURE_WORDS = "A temperature is a number of K above zero and up to 100,000, such as 298.15.";

/** An option of an address: left out or left empty both mean the default. */
function optional<Schema extends z.ZodType>(schema: Schema) {
  return z
    .literal("")
    .transform(() => undefined)
    .or(schema)
    .optional();
}

/** How openapi.json shows what travels as text: the shape that a caller means. */
function shownAs(shape: Record<string, unknown>, description: string) {
  const override = ({ jsonSchema }: { jsonSchema: Record<string, unknown> }) => {
    for (const key of Object.keys(jsonSchema)) delete jsonSchema[key];
    Object.assign(jsonSchema, shape, { description });
  };
  return { description, override };
}

// --- what goes wrong ---------------------------------------------------------------------------

export const problemSchema = z
  // RFC 9457 lets a problem carry further members, such as the row of the acceptance tables or the sift concerned.
  .looseObject({
    type: z.string(),
    title: z.string(),
    status: z.number().int(),
    detail: z.string().optional(),
    errors: z
      .array(
        z.object({
          field: z.string().optional(),
          file: z.string().optional(),
          frame: z.number().int().optional(),
          line: z.number().int().optional(),
          message: z.string(),
        }),
      )
      .optional(),
    existing: id
      .optional()
      .meta({ description: "409 of an upload: the ensemble that these bytes already made." }),
    url: z.string().optional().meta({ description: "409 of an upload: its address." }),
  })
  .meta({ id: "Problem", description: "RFC 9457, application/problem+json" });

/** What a caller should know of an answer that is right all the same: nothing that was asked is passed over in silence. */
export const warningsSchema = z
  .array(z.object({ code: z.string(), message: z.string() }).meta({ id: "Warning" }))
  .meta({ description: "What is to be known beside the answer; empty where there is nothing." });
export type Warnings = z.infer<typeof warningsSchema>;

// --- ensembles ---------------------------------------------------------------------------------

export const ENERGY_KINDS = ["electronic", "zero-point", "enthalpy", "free"] as const;
/** Units that a request may state. */
export const REQUEST_UNITS = ["hartree", "kcal/mol", "kJ/mol", "eV"] as const;

/** Fields of an upload beside its files. Unknown ones are refused. */
export const uploadFieldsSchema = z
  .strictObject({
    name: z
      .string()
      .trim()
      .min(1)
      .max(200)
      .optional()
      .meta({ description: "Default: the first file's name." }),
    series: z
      .string()
      .trim()
      .min(1)
      .max(120)
      .optional()
      .meta({ description: 'Name of the series, made if new. Default: "Unsorted".' }),
    level: z
      .string()
      .trim()
      .min(1)
      .max(120)
      .optional()
      .meta({ description: "Name of the level of theory of the energies in the files." }),
    energyUnit: z
      .enum(REQUEST_UNITS)
      .optional()
      .meta({ description: "Unit of these energies; without it the unit must stand beside the number." }),
    energyFrom: z
      .string()
      .regex(/^(key:.+|field:.+|number:[1-9]\d{0,5}|none)$/s, "Write key:NAME, field:NAME, number:N or none.")
      .max(200)
      .optional()
      .meta({
        description:
          "Which number is the energy: key:NAME (the run of characters before = or :, exact in case), number:N (every number of the comment line counts, from 1) or field:NAME (a data field of an SDF, exact in case); none where the files hold no energy.",
      }),
    energyKind: z.enum(ENERGY_KINDS).optional().meta({ description: "Default: electronic." }),
    energyTemperature: numberText(0.001, 100_000, TEMPERATURE_WORDS)
      .optional()
      .meta(
        shownAs(
          { type: "number", minimum: 0.001, maximum: 100_000 },
          "K; for energies that belong to one temperature.",
        ),
      ),
  })
  .meta({ id: "UploadFields" });
export type UploadFields = z.infer<typeof uploadFieldsSchema>;

/** Fields of a further batch beside its files; what is left out is that of the ensemble where the files are alike. */
export const batchFieldsSchema = z
  .strictObject({
    name: z
      .string()
      .trim()
      .min(1)
      .max(200)
      .optional()
      .meta({ description: "What this search or batch is called." }),
    level: uploadFieldsSchema.shape.level.meta({
      description: "Default: the level of the ensemble's own energies.",
    }),
    energyUnit: uploadFieldsSchema.shape.energyUnit.meta({
      description:
        "Default: the unit beside the number, else that of the level where the values lie where its own do.",
    }),
    energyFrom: uploadFieldsSchema.shape.energyFrom.meta({
      description:
        "Default: the number that the ensemble's own energies come from, where these files have it.",
    }),
    energyKind: uploadFieldsSchema.shape.energyKind.meta({ description: "Default: that of the level." }),
    energyTemperature: uploadFieldsSchema.shape.energyTemperature,
  })
  .meta({ id: "BatchFields" });
export type BatchFields = z.infer<typeof batchFieldsSchema>;

export const intakeMessageSchema = z
  .object({
    code: z.string(),
    severity: z.enum(["remark", "hold", "question", "reject"]),
    file: z.string(),
    line: z.number().int().positive().optional(),
    column: z.number().int().positive().optional(),
    frame: frameNumber.optional(),
    atom: z.number().int().positive().optional(),
    found: z.string().optional(),
    message: z.string(),
    hint: z.string().optional(),
  })
  .meta({ id: "IntakeMessage" });

export const questionSchema = z
  .object({
    id: z.string(),
    code: z.string(),
    text: z.string(),
    reason: z.string().optional(),
    options: z.array(
      z.object({
        id: z.string(),
        text: z.string(),
        detail: z.string().optional(),
        values: z.array(z.string().nullable()).optional(),
        spreadKcal: z.number().nullable().optional(),
        spread: z.number().nullable().optional(),
        proposed: z.boolean().optional(),
      }),
    ),
  })
  .meta({ id: "Question" });

export const intakeSchema = z
  .object({
    frames: z.number().int(),
    accepted: z.number().int(),
    remarked: z.number().int().meta({ description: "Those of the accepted that carry a remark." }),
    held: z.number().int(),
    messages: z.array(intakeMessageSchema),
    questions: z.array(questionSchema).meta({ description: "Those still open." }),
  })
  .meta({ id: "Intake", description: "frames = accepted + held" });

export const levelSchema = z
  .object({
    id,
    name: z.string(),
    unit: z.string().meta({ description: "Unit of the source." }),
    count: z.number().int().meta({ description: "Accepted frames with a value." }),
    missing: z.number().int().meta({ description: "Accepted frames without a value." }),
    energyKind: z.enum(ENERGY_KINDS),
    temperature: z.number().nullable(),
  })
  .meta({ id: "Level" });

export const columnSchema = z
  .object({
    id,
    name: z.string(),
    kind: z.enum(["energy", "property"]),
    unit: z.string().nullable(),
    rule: z
      .string()
      .nullable()
      .optional()
      .meta({ description: "How a property is averaged: linear, r-6, r-3 or circular; null for energies." }),
    count: z.number().int(),
    missing: z.number().int(),
  })
  .meta({ id: "Column" });

export const ensembleSchema = z
  .object({
    id,
    url: z.string().meta({ description: "Its page." }),
    name: z.string(),
    series: z.object({ id, name: z.string() }),
    formula: z.string().meta({ description: "Hill order." }),
    atoms: z.number().int(),
    chirality: z.enum(["achiral", "chiral", "unsure"]),
    intake: intakeSchema,
    levels: z.array(levelSchema),
    columns: z.array(columnSchema),
    files: z.array(
      z.object({
        name: z.string(),
        sha256: z.string(),
        bytes: z.number().int(),
        frames: z.number().int(),
        batch: z
          .number()
          .int()
          .positive()
          .meta({ description: "Which upload or search brought it, from 1." }),
      }),
    ),
    createdAt: z.string(),
    warnings: warningsSchema.optional(),
  })
  .meta({ id: "Ensemble" });
export type EnsembleAnswer = z.infer<typeof ensembleSchema>;

export const ensembleListSchema = z
  .object({
    ensembles: z.array(
      ensembleSchema
        .omit({ columns: true, files: true, intake: true, chirality: true, warnings: true })
        .extend({
          intake: intakeSchema.omit({ messages: true, questions: true }).extend({
            openQuestions: z.number().int(),
          }),
        }),
    ),
    page: z.number().int().positive(),
    pages: z.number().int(),
    total: z.number().int(),
  })
  .meta({ id: "EnsembleList" });
export type EnsembleListAnswer = z.infer<typeof ensembleListSchema>;

export const ensembleListQuerySchema = z.object({
  series: optional(z.string().max(120)).meta(shownAs({ type: "string" }, "Name or id of a series.")),
  page: optional(
    z
      .string()
      .regex(/^[1-9]\d{0,5}$/, "Pages are counted from 1.")
      .transform(Number),
  ).meta(shownAs({ type: "integer", minimum: 1, default: 1 }, "From 1; 50 ensembles a page.")),
});

const answerList = z
  .array(z.strictObject({ id: z.string().min(1).max(40), option: z.string().min(1).max(200) }))
  .max(20);

export const answersRequestSchema = z
  .strictObject({ answers: answerList.min(1) })
  .meta({ id: "AnswersRequest" });
export type AnswersRequest = z.infer<typeof answersRequestSchema>;

export const rereadRequestSchema = z
  .strictObject({
    level: z.string().trim().min(1).max(120).optional(),
    energyUnit: z.enum(REQUEST_UNITS).optional(),
    energyFrom: uploadFieldsSchema.shape.energyFrom,
    energyKind: z.enum(ENERGY_KINDS).optional(),
    energyTemperature: z
      .union([z.number().min(0.001).max(100_000), uploadFieldsSchema.shape.energyTemperature.unwrap()])
      .optional()
      .meta(shownAs({ type: "number", minimum: 0.001, maximum: 100_000 }, "K")),
    answers: answerList.optional().meta({
      description:
        'New answers to what intake asked of the files themselves, such as the configuration: id of the question and an option, or "ask" to be asked again. Those that are not named stay.',
    }),
  })
  .meta({
    id: "RereadRequest",
    description: "The new answers; what is left out of unit, number, level and kind is open again.",
  });
export type RereadRequest = z.infer<typeof rereadRequestSchema>;

export const decisionRequestSchema = z
  .strictObject({ reason: z.string().trim().min(1).max(500) })
  .meta({ id: "DecisionRequest" });

export const decisionAnswerSchema = z
  .object({
    frame: frameNumber,
    state: z.enum(["accepted", "remarked", "held"]),
    intake: intakeSchema,
  })
  .meta({ id: "DecisionAnswer" });

// --- columns -----------------------------------------------------------------------------------

const yes = z.enum(["true", "false"]).transform((text) => text === "true");

/** Fields beside the file of further columns: the contract's first, then answers to what a file may leave open. */
export const columnFieldsSchema = z
  .strictObject({
    kind: z.enum(["energy", "property"]).optional().meta({
      description: "For all columns of a table; without it the unit decides, column by column.",
    }),
    level: uploadFieldsSchema.shape.level.meta({
      description:
        "Name of the level of the energies: needed with a structure file; in a table each header names its own.",
    }),
    energyUnit: uploadFieldsSchema.shape.energyUnit,
    energyFrom: uploadFieldsSchema.shape.energyFrom,
    energyKind: uploadFieldsSchema.shape.energyKind,
    energyTemperature: uploadFieldsSchema.shape.energyTemperature,
    rule: z.enum(["linear", "r-6", "r-3", "circular"]).optional().meta({
      description: "How the properties are averaged. Default: linear, circular for angles in ° or deg.",
    }),
    replace: yes
      .optional()
      .meta(shownAs({ type: "boolean", default: false }, "Columns of the same name get the new numbers.")),
    geometryLevel: z.string().trim().min(1).max(120).optional().meta({
      description: "Level of the geometry, where it is another than that of the energy.",
    }),
    solvent: z.string().trim().min(1).max(120).optional(),
    match: z.enum(["structure", "label", "number"]).optional().meta({
      description: "How the frames of a structure file are matched. Default: structure.",
    }),
    sift: id.optional().meta({
      description: "Matches within the tolerance of this sift; default 0.2 Å, heavy+polarH.",
    }),
    delimiter: z.enum(["comma", "semicolon", "tab", "bar"]).optional(),
    numbers: z.enum(["point", "comma", "point-thousands", "comma-thousands"]).optional().meta({
      description:
        "How a table writes numbers: 1.5, 1,5, 1,234.5 or 1.234,5; of a structure file: point or comma.",
    }),
    header: z.enum(["first", "none"]).optional(),
    key: z.enum(["frame", "label"]).optional().meta({ description: "What the first column holds." }),
    firstFrame: z
      .enum(["0", "1"])
      .optional()
      .meta({ description: "Number that a table gives the first frame." }),
    labels: z.enum(["exact", "loose"]).optional().meta({
      description: "loose: labels that differ in case or blanks only are the same.",
    }),
    perAtom: z.enum(["bound", "plain"]).optional().meta({
      description: "plain: headers such as C6 name no atom.",
    }),
    columns: z.string().max(60_000).optional().meta({
      description:
        "JSON: choices for single columns, [{column, use, name, unit, kind, rule, atom, quantity}].",
    }),
    preview: yes
      .optional()
      .meta(shownAs({ type: "boolean", default: false }, "Says what would be kept, and keeps nothing.")),
  })
  .meta({ id: "ColumnFields" });
export type ColumnFields = z.infer<typeof columnFieldsSchema>;

/** What a caller may choose of single columns of a table. */
export const columnChoicesSchema = z
  .array(
    z.strictObject({
      column: z.number().int().min(2).max(10_000),
      use: z.boolean().optional(),
      name: z.string().trim().min(1).max(120).optional(),
      unit: z.string().trim().max(40).optional(),
      kind: z.enum(["energy", "property"]).optional(),
      rule: z.enum(["linear", "r-6", "r-3", "circular"]).optional(),
      atom: z.number().int().positive().nullable().optional(),
      quantity: z.string().trim().min(1).max(120).optional(),
    }),
  )
  .max(3_000);

export const columnsAnswerSchema = z
  .object({ columns: z.array(columnSchema), messages: z.array(intakeMessageSchema) })
  .meta({ id: "ColumnsAnswer" });

export const columnsPreviewSchema = z
  .object({
    file: z.string(),
    type: z.enum(["table", "structures"]),
    delimiter: z.string().nullable(),
    header: z.array(z.string()),
    rows: z.array(z.array(z.string())),
    columns: z.array(
      z.object({
        column: z.number().int().nullable(),
        header: z.string(),
        name: z.string(),
        kind: z.enum(["energy", "property"]),
        unit: z.string().nullable(),
        why: z.string(),
        rule: z.string().nullable(),
        atom: z.number().int().nullable(),
        quantity: z.string().nullable(),
        count: z.number().int(),
        looksLikeEnergy: z
          .boolean()
          .meta({ description: "A property that is probably an energy, and nobody has said which." }),
        exists: z.boolean().meta({ description: "A column of this name is there already." }),
        conflict: z
          .string()
          .nullable()
          .meta({ description: "Why it cannot take the place of that column, as the 409 says; else null." }),
      }),
    ),
    leftOut: z.array(z.object({ column: z.number().int().nullable(), header: z.string(), why: z.string() })),
    match: z.object({
      by: z.enum(["frame", "label", "structure", "number"]),
      text: z.string(),
      rows: z.number().int(),
      matched: z.number().int(),
      missing: z.number().int(),
      unknown: z.number().int(),
      shared: z.number().int(),
    }),
    questions: z.array(questionSchema),
    messages: z.array(intakeMessageSchema),
  })
  .meta({ id: "ColumnsPreview" });
export type ColumnsPreview = z.infer<typeof columnsPreviewSchema>;

// --- sifts -------------------------------------------------------------------------------------

export const siftStatusSchema = z.enum(["queued", "running", "done", "failed", "cancelled"]);

export const siftAcceptedSchema = z
  .object({
    id,
    status: siftStatusSchema,
    progress: z.number().min(0).max(1),
    warnings: warningsSchema.optional(),
  })
  .meta({ id: "SiftAccepted" });

export const siftResultSchema = z
  .object({
    kept: z.array(
      z.object({
        frame: frameNumber,
        relativeEnergy: z.number().nullable(),
        degeneracy: z.number().int(),
        symmetryNumber: z.number().int().nullable(),
        copies: z.number().nullable(),
        mirrorRmsd: z.number(),
        found: z.number().int(),
        foundIn: z
          .array(z.object({ batch: z.number().int().positive(), found: z.number().int() }))
          .optional()
          .meta({ description: "found by batch, where the ensemble grew by further ones." }),
        upperBound: z.boolean().optional(),
      }),
    ),
    dropped: z.array(
      z.object({
        frame: frameNumber,
        repeats: frameNumber,
        rmsd: z.number(),
        energyDifference: z.number().nullable(),
        mirror: z.boolean().optional(),
        upperBound: z.boolean().optional(),
      }),
    ),
    held: z.array(z.object({ frame: frameNumber, reason: z.string() })),
    outsideWindow: z.array(frameNumber),
    withoutEnergy: z.array(frameNumber),
    pairsExamined: z.number(),
    seconds: z.number(),
  })
  .meta({ id: "SiftResult" });

export const siftSchema = z
  .object({
    id,
    status: siftStatusSchema,
    progress: z.number().min(0).max(1),
    pairs: z.number().int().optional().meta({ description: "Pairs compared so far, while it runs." }),
    ensemble: id,
    recipe: siftRecipeSchema,
    result: siftResultSchema.nullable(),
    error: z.string().nullable(),
    current: z.boolean().meta({ description: "False where frames or energies changed since." }),
    warnings: warningsSchema,
  })
  .meta({ id: "Sift" });

/** Seconds that an answer is held at most; who asks for more asks again. */
const MAX_WAIT_SECONDS = 60;

export const siftQuerySchema = z.object({
  wait: optional(
    numberText(0, Number.MAX_VALUE, "Give the seconds to wait as a number, such as 30.").transform(
      (seconds) => Math.min(seconds, MAX_WAIT_SECONDS),
    ),
  ).meta(
    shownAs(
      { type: "number", minimum: 0, default: 0 },
      `Seconds to hold the answer until the sift has ended; more than ${MAX_WAIT_SECONDS} count as ${MAX_WAIT_SECONDS}.`,
    ),
  ),
});

const temperature = optional(numberText(0.001, 100_000, TEMPERATURE_WORDS)).meta(
  shownAs({ type: "number", minimum: 0.001, maximum: 100_000, default: STANDARD_TEMPERATURE_K }, "K"),
);
const weights = optional(z.enum(["auto", "copies", "degeneracy"])).meta(
  shownAs(
    { type: "string", enum: ["auto", "copies", "degeneracy"], default: "auto" },
    "auto takes copies for energies without the symmetry number, degeneracy for free energies.",
  ),
);

export const populationsQuerySchema = z.object({
  temperature,
  level: optional(z.string().max(200)).meta(
    shownAs({ type: "string" }, "Id or name; default: the level of the sift."),
  ),
  weights,
});

export const averagesQuerySchema = z.object({
  temperature,
  weights,
  sigma: optional(numberText(0, 100, "An error of the level in kcal/mol from 0 to 100, such as 0.5.")).meta(
    shownAs(
      { type: "number", minimum: 0, maximum: 100 },
      "Error of the level in kcal/mol (one standard deviation); without it `uncertainty` stays empty.",
    ),
  ),
  level: optional(z.string().max(200)).meta(
    shownAs({ type: "string" }, "Id or name; default: the level of the sift."),
  ),
});

export const comparisonQuerySchema = z.object({
  level: z.string("Name the level that is compared.").min(1).max(200).meta({ description: "Id or name." }),
  reference: z
    .string("Name the reference level.")
    .min(1)
    .max(200)
    .meta({ description: "Id or name; differences are level - reference." }),
  sift: optional(id).meta(
    shownAs(
      { type: "string" },
      "Id of a sift: its kept frames, weighted by its copies. Default: all accepted.",
    ),
  ),
  temperature,
  align: optional(z.enum(["own-minimum", "common", "least-squares", "median"])).meta(
    shownAs(
      {
        type: "string",
        enum: ["own-minimum", "common", "least-squares", "median"],
        default: "least-squares",
      },
      "Which zero the two levels share; common is the reference's lowest frame.",
    ),
  ),
});

export const comparisonSchema = z
  .object({
    level: id,
    reference: id,
    temperature: z.number(),
    align: z.enum(["own-minimum", "common", "least-squares", "median"]),
    sift: id.nullable(),
    n: z.number().int(),
    msd: z.number().meta({ description: "kcal/mol, as all that follow; divided by n." }),
    mad: z.number(),
    rmsd: z.number(),
    sd: z.number().nullable().meta({ description: "About the mean, n - 1." }),
    max: z.number().meta({ description: "Absolute." }),
    maxFrame: frameNumber,
    pearson: z.number().nullable().meta({ description: "null for n < 4 or a constant level." }),
    spearman: z.number().nullable(),
    kendall: z.number().nullable().meta({ description: "tau-b" }),
    populationOverlap: z.number(),
    jensenShannon: z.number().meta({ description: "Bits." }),
    window: z
      .array(z.object({ share: z.number(), kcal: z.number(), count: z.number().int() }))
      .meta({ description: "Taken at level: the window that holds that share of the reference population." }),
  })
  .meta({ id: "Comparison" });
export type ComparisonAnswer = z.infer<typeof comparisonSchema>;

/** What export.json holds; more may be added. */
export const exportJsonSchema = z
  .looseObject({
    schema: z.literal("lowlying-distinct-set"),
    schemaVersion: z.number().int(),
    caution: z.string(),
    constants: z.string(),
    units: z.record(z.string(), z.string().nullable()),
    ensemble: z.object({ id, name: z.string(), formula: z.string() }),
    elements: z.array(z.number().int()).meta({ description: "Atomic numbers in the order of the ensemble." }),
    isotopes: z.array(z.number().int()).nullable(),
    bonds: z.array(z.array(z.number().int())).meta({ description: "Pairs of atoms, from 1." }),
    columns: z.array(z.object({ name: z.string(), unit: z.string().nullable() })),
    sources: z.array(z.looseObject({ name: z.string(), sha256: z.string() })),
    level: z.looseObject({ name: z.string(), unit: z.string(), energyKind: z.string() }).nullable(),
    recipe: siftRecipeSchema,
    temperature: z.number(),
    weights: z.enum(["copies", "degeneracy"]).nullable(),
    current: z
      .literal(false)
      .optional()
      .meta({ description: "Where frames were held, released or added since the sift; absent else." }),
    warnings: warningsSchema.optional(),
    conformers: z.array(
      z.looseObject({
        frame: frameNumber,
        label: z.string().nullable(),
        energy: z.number().nullable().meta({ description: "kcal/mol" }),
        sourceEnergy: z
          .number()
          .nullable()
          .meta({ description: "As the source has it, in the level's unit." }),
        relativeEnergy: z.number().nullable(),
        population: z.number().nullable(),
        degeneracy: z.number().int(),
        symmetryNumber: z.number().int().nullable(),
        copies: z.number().nullable(),
        mirrorRmsd: z.number(),
        found: z.number().int(),
        source: z.string().nullable(),
        values: z.array(z.number().nullable()).meta({ description: "In the order of columns." }),
        positions: z.array(z.array(z.number())).meta({ description: "[atom][xyz] in Å." }),
      }),
    ),
  })
  .meta({ id: "DistinctSet", description: "The distinct set with its structures." });

export const exportQuerySchema = z.object({ temperature });

export const populationsSchema = z
  .object({
    temperature: z.number(),
    level: id,
    levelName: z.string(),
    weights: z.enum(["copies", "degeneracy"]),
    weightsReason: z.string(),
    conformers: z.array(
      z.object({
        frame: frameNumber,
        relativeEnergy: z.number(),
        weight: z.number(),
        population: z.number(),
      }),
    ),
    withoutEnergy: z.array(frameNumber).meta({ description: "Kept frames without an energy at this level." }),
    freeEnergy: z.number().meta({ description: "Relative to the lowest conformer, kcal/mol." }),
    energy: z.number().meta({ description: "Mean, relative to the lowest conformer, kcal/mol." }),
    entropy: z.number().meta({ description: "cal/(mol K)" }),
    heatCapacity: z.number().meta({ description: "cal/(mol K)" }),
    effectiveCount: z.number().meta({ description: "exp(entropy/R), microstates." }),
    warnings: warningsSchema,
  })
  .meta({ id: "Populations" });
export type PopulationsAnswer = z.infer<typeof populationsSchema>;
