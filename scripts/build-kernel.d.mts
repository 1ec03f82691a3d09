/** The bytes of the WebAssembly kernel. */
export function compileKernel(): Promise<Uint8Array<ArrayBuffer>>;
