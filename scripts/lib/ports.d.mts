export function isPortFree(port: number, host?: string): Promise<boolean>;
export function findFreePort(from: number, taken?: readonly number[]): Promise<number>;
export function randomPort(): number;
