import { compileCatalogues } from "./lib/catalogues.mjs";
import { runMain } from "./lib/failure.mjs";

await runMain(compileCatalogues);
