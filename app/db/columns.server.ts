import { customType } from "drizzle-orm/mysql-core";
import type { z } from "zod";

/** Ids are made in the application (`new-id.server.ts`): 16 characters of base32, 80 random bits. */
export const ID_LENGTH = 16;

/** Case-sensitive ASCII id. */
export const idColumn = customType<{ data: string; driverData: string }>({
  dataType: () => `char(${ID_LENGTH}) character set ascii collate ascii_bin`,
});

/** SHA-256 or another 32-byte value, binary; compared by the server byte for byte. */
export const sha256Column = customType<{ data: Buffer; driverData: Buffer }>({
  dataType: () => "binary(32)",
});

/** Packed bytes: doubles, presence bits, compressed chunks. */
export const bytesColumn = customType<{ data: Buffer; driverData: Buffer }>({
  dataType: () => "longblob",
});

/** Longer text than `text` holds. */
export const longTextColumn = customType<{ data: string; driverData: string }>({
  dataType: () => "longtext",
});

/** UTC timestamp with milliseconds. The connection runs in UTC (client.server.ts). */
export const timeColumn = customType<{ data: Date; driverData: Date | string }>({
  dataType: () => "datetime(3)",
  fromDriver: (value) => (value instanceof Date ? value : new Date(`${value.replace(" ", "T")}Z`)),
});

/**
 * JSON that is checked on the way out: a row written by older code still has to parse.
 * MariaDB's JSON is checked text and arrives as text.
 */
export function jsonColumn<Schema extends z.ZodType>(schema: Schema) {
  return customType<{ data: z.infer<Schema>; driverData: string }>({
    dataType: () => "json",
    toDriver: (value) => JSON.stringify(value),
    fromDriver: (value) =>
      schema.parse(typeof value === "string" ? JSON.parse(value) : value) as z.infer<Schema>,
  });
}
