import { AsyncLocalStorage } from "node:async_hooks";

const storage = new AsyncLocalStorage<string>();

/** Runs work under a request's or a job's id, which its events and log lines carry. */
export const withRequestId = <T>(id: string, work: () => T): T => storage.run(id, work);
export const currentRequestId = (): string | null => storage.getStore() ?? null;
