export function ensureProgram(program: string, packageName: string): Promise<string>;
