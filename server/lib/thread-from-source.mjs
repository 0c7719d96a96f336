/** Loads a thread's file from the TypeScript sources, in development and in tests: a thread inherits no loader. */
import { register } from "tsx/esm/api";

register();
await import(process.argv[2]);
