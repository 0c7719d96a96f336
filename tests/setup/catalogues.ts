import { compileCatalogues } from "../../scripts/lib/catalogues.mjs";

export default compileCatalogues;
