import { z } from "zod";
import { createDocument, type ZodOpenApiOperationObject } from "zod-openapi";
import * as api from "../lib/api/schemas.ts";
import { siftRequestSchema } from "../lib/recipe/recipe.ts";

const problem = (description: string) => ({
  description,
  content: { "application/problem+json": { schema: api.problemSchema } },
});
const json = (schema: z.ZodType, description: string) => ({
  description,
  content: { "application/json": { schema } },
});
const body = (schema: z.ZodType) => ({ required: true, content: { "application/json": { schema } } });

/** What every call may answer. */
const REFUSALS = {
  "401": problem("No valid token"),
  "403": problem("The token or its user may not do this"),
  "404": problem("Does not exist, or no access to it"),
  "405": problem("Another method; Allow says which are known here"),
  "422": problem("Not as it should be; errors[] names field, file, frame or line"),
  "429": problem("Too many calls; Retry-After says when to come back"),
};

/** What calls with a body may answer beside that. */
const BODY_REFUSALS = {
  "400": problem("The body does not parse"),
  "408": problem("The body came too slowly"),
  "413": problem("More bytes than the limit"),
  "415": problem("Another content type than the call takes"),
};

const idParam = z
  .string()
  .meta({ description: "16 characters, a to z and 2 to 7", example: "k3vq2xw7mzta5hcd" });
const path = z.object({ id: idParam });
const framePath = z.object({ id: idParam, frame: z.number().int().positive() });

function call(
  operationId: string,
  summary: string,
  operation: Omit<ZodOpenApiOperationObject, "operationId" | "summary">,
): ZodOpenApiOperationObject {
  const ofBody = operation.requestBody === undefined ? {} : BODY_REFUSALS;
  return {
    operationId,
    summary,
    ...operation,
    responses: { ...operation.responses, ...REFUSALS, ...ofBody },
  };
}

/** A form with files beside its fields. */
const formWithFiles = (fields: typeof api.uploadFieldsSchema | typeof api.batchFieldsSchema) => ({
  required: true,
  content: {
    "multipart/form-data": {
      schema: z.strictObject({
        ...fields.shape,
        file: z
          .array(z.string().meta({ format: "binary" }))
          .min(1)
          .meta({
            description:
              "XYZ, extended XYZ or SDF, plain, gzip or in a zip archive; frames are numbered on through all files.",
          }),
      }),
    },
  },
});
const upload = formWithFiles(api.uploadFieldsSchema);
const batchUpload = formWithFiles(api.batchFieldsSchema);

const ensembles = {
  "/ensembles": {
    post: call("takeIn", "Take files in as one ensemble", {
      requestBody: upload,
      responses: {
        "201": json(api.ensembleSchema, "A new ensemble"),
        "200": json(
          api.ensembleSchema,
          "The same bytes with the same answers came before: the same ensemble",
        ),
        "409": problem("The same bytes came before with other answers: existing and url say where"),
      },
    }),
    get: call("listEnsembles", "List ensembles, newest first", {
      requestParams: { query: api.ensembleListQuerySchema },
      responses: { "200": json(api.ensembleListSchema, "One page") },
    }),
  },
  "/ensembles/{id}": {
    get: call("getEnsemble", "One ensemble with its intake report, levels and columns", {
      requestParams: { path },
      responses: { "200": json(api.ensembleSchema, "The ensemble") },
    }),
  },
  "/ensembles/{id}/files": {
    post: call("addFiles", "Add a second search or a further batch of the same molecule", {
      requestParams: { path },
      requestBody: batchUpload,
      responses: {
        "201": json(api.ensembleSchema, "The ensemble with the frames of the batch, numbered on"),
        "200": json(api.ensembleSchema, "The same bytes came before: nothing was added"),
        "409": problem("Questions are open, or the same bytes came before with other answers"),
      },
    }),
  },
  "/ensembles/{id}/answers": {
    post: call("answer", "Answer what intake asked", {
      requestParams: { path },
      requestBody: body(api.answersRequestSchema),
      responses: {
        "200": json(z.object({ intake: api.intakeSchema }), "The new intake report"),
        "409": problem("The question was answered before"),
      },
    }),
  },
  "/ensembles/{id}/reread": {
    post: call("reread", "Read the stored files again with other answers", {
      requestParams: { path },
      requestBody: body(api.rereadRequestSchema),
      responses: { "200": json(api.ensembleSchema, "The ensemble as it is now") },
    }),
  },
  "/ensembles/{id}/frames/{frame}/release": {
    post: call("release", "Release a held frame", {
      requestParams: { path: framePath },
      requestBody: body(api.decisionRequestSchema),
      responses: {
        "200": json(
          api.decisionAnswerSchema,
          "The frame is used from now on; the same call again changes nothing",
        ),
        "409": problem("Not held, another species or configuration, or broken"),
      },
    }),
  },
  "/ensembles/{id}/frames/{frame}/hold": {
    post: call("hold", "Hold a frame: keep it, leave it out of every computation", {
      requestParams: { path: framePath },
      requestBody: body(api.decisionRequestSchema),
      responses: {
        "200": json(
          api.decisionAnswerSchema,
          "The frame is held from now on; the same call again changes nothing",
        ),
        "409": problem("It is held already for another reason"),
      },
    }),
  },
};

const columnsBody = {
  required: true,
  content: {
    "multipart/form-data": {
      schema: api.columnFieldsSchema.extend({
        file: z.string().meta({
          format: "binary",
          description:
            "A table (first column frame or label, every further one a quantity, its unit as name [unit]), or a structure file with the same frames in any order; plain or gzip.",
        }),
      }),
    },
  },
};

const columnCalls = {
  "/ensembles/{id}/comparison": {
    get: call("compare", "Two levels of theory on the same frames", {
      requestParams: { path, query: api.comparisonQuerySchema },
      responses: {
        "200": json(api.comparisonSchema, "The comparison"),
        "409": problem("The sift is not done"),
      },
    }),
  },
  "/ensembles/{id}/columns": {
    post: call("addColumns", "Add energies or properties from a table or a second structure file", {
      requestParams: { path },
      requestBody: columnsBody,
      responses: {
        "201": json(api.columnsAnswerSchema, "The columns, with what is to be said of the file"),
        "200": json(api.columnsPreviewSchema, "With preview=true: what would be kept"),
        "409": problem("A name is taken; replace=true puts the new numbers in its place"),
        "413": problem("More bytes or values than the limit"),
        "415": problem("No multipart/form-data"),
      },
    }),
  },
};

const file = (type: string, schema: z.ZodType) => ({
  description: "The distinct set as a file",
  content: { [type]: { schema } },
});

const exportCall = (format: string, type: string, schema: z.ZodType = z.string()) => ({
  get: call(`export${format}`, `The distinct set as ${format}`, {
    requestParams: { path, query: api.exportQuerySchema },
    responses: { "200": file(type, schema), "409": problem("The sift is not done") },
  }),
});

const sifts = {
  "/ensembles/{id}/sifts": {
    post: call("sift", "Reduce the accepted frames to the distinct set", {
      requestParams: { path },
      requestBody: body(siftRequestSchema),
      responses: {
        "202": {
          ...json(api.siftAcceptedSchema, "Asked for, or known already; Location says where to look"),
          headers: { Location: { schema: { type: "string" } } },
        },
        "409": problem("All frames wait for an answer"),
      },
    }),
  },
  "/sifts/{id}": {
    get: call("getSift", "A sift and, once done, its result", {
      requestParams: { path, query: api.siftQuerySchema },
      responses: { "200": json(api.siftSchema, "The sift") },
    }),
    delete: call("cancelSift", "Cancel a sift", {
      requestParams: { path },
      responses: { "202": json(api.siftAcceptedSchema, "Cancelled, unless it had ended before") },
    }),
  },
  "/sifts/{id}/populations": {
    get: call("populations", "Populations and conformational thermodynamics", {
      requestParams: { path, query: api.populationsQuerySchema },
      responses: {
        "200": json(api.populationsSchema, "Populations"),
        "409": problem("The sift is not done"),
      },
    }),
  },
  "/sifts/{id}/averages.csv": {
    get: call("exportAverages", "Boltzmann-weighted averages of all property columns as CSV", {
      requestParams: { path, query: api.averagesQuerySchema },
      responses: {
        "200": {
          description:
            "One row a property column: property, unit, rule, average, spread, uncertainty, covered. Where less than 90 % of the population has a value, average, spread and uncertainty are empty.",
          content: { "text/csv": { schema: z.string() } },
        },
        "409": problem("The sift is not done"),
      },
    }),
  },
  "/sifts/{id}/export.xyz": exportCall("XYZ", "chemical/x-xyz"),
  "/sifts/{id}/export.sdf": exportCall("SDF", "chemical/x-mdl-sdfile"),
  "/sifts/{id}/export.csv": exportCall("CSV", "text/csv"),
  "/sifts/{id}/export.json": exportCall("JSON", "application/json", api.exportJsonSchema),
};

const description =
  "Energies are kcal/mol (but for energyUnit and a level's own unit), lengths Å, temperatures K; frames count from 1 in " +
  "file order, on through all files of an upload. A level is given by its id or its name.";

const itself = {
  "/openapi.json": {
    get: {
      operationId: "openapi",
      summary: "This description; needs no token",
      security: [],
      responses: {
        "200": json(z.looseObject({ openapi: z.string() }), "OpenAPI 3.1"),
        "429": REFUSALS["429"],
      },
    },
  },
};

let made: ReturnType<typeof createDocument> | undefined;

/** The API as OpenAPI 3.1, from the schemas that validate. */
export function openApiDocument(): object {
  made ??= createDocument({
    openapi: "3.1.0",
    info: { title: "Lowlying", version: "1", description },
    servers: [{ url: "/api/v1" }],
    security: [{ token: [] }],
    components: { securitySchemes: { token: { type: "http", scheme: "bearer" } } },
    paths: { ...ensembles, ...columnCalls, ...sifts, ...itself },
  });
  return made;
}
