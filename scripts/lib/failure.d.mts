export class Failure extends Error {}
export function runMain(main: () => Promise<void>): Promise<void>;
