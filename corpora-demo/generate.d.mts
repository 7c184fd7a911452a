/** The four demo files, by name, as bytes: the same on every machine. */
export function generateDemo(): Map<string, Uint8Array>;

/** What sha256.txt holds for these files: one `hash  name` a line. */
export function listHashes(files: ReadonlyMap<string, Uint8Array>): string;
