export function compileCatalogues(): Promise<void>;
