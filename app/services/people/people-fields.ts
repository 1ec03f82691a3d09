import { z } from "zod";

/** What the forms of the people page send. */
export const roleSchema = z.enum(["owner", "analyst", "reader"], {
  error: "Choose owner, analyst or reader.",
});

/** An address in the one form in which addresses are compared. */
export const addressSchema = z
  .string()
  .trim()
  .toLowerCase()
  .max(254, "A mail address has at most 254 characters.")
  .regex(
    /^[^\s@]+@[^\s@.]+(\.[^\s@.]+)*$/,
    "This is no mail address; one looks like name@laboratory.example.",
  );

export const invitationSchema = z.strictObject({ email: addressSchema, role: roleSchema });

/** Days that an invitation waits. */
export const INVITATION_DAYS = 7;
