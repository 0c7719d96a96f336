export const cataloguePartNames: readonly string[];
export function partOfSource(path: string): string | undefined;
export function textsInSource(source: string): readonly string[];
