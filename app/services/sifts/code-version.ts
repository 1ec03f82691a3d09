/** Version of the computing code, kept with every result; moves when the same input could give other digits. */
export const CODE_VERSION = "1";
