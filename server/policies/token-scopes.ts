import { TOKEN_SCOPES, type TokenScope } from "../../shared/schemas/api-token";

/**
 * What a token of a scope may call, by method and path. Whatever stands nowhere here is closed to every token; what is open is
 * still subject to the policies of the token's person, row by row.
 */
export const TOKEN_ROUTES: Readonly<Record<TokenScope, readonly string[]>> = {
  /** How the work is described: nobody's exposure. */
  "read-programme": [
    "GET /sites",
    "GET /sites/:id",
    "GET /areas",
    "GET /tasks",
    "GET /tasks/:id",
    "GET /jobs",
    "GET /crews",
    "GET /instruments",
    "GET /protectors",
    "GET /protectors/:id",
    "GET /protector-combinations",
    "GET /warning-signals",
    "GET /rule-sets",
    "POST /evaluate",
  ],
  /** Levels and verdicts of people. */
  "read-results": [
    "GET /workers",
    "GET /workers/:id",
    "GET /workers/:id/assignments",
    "GET /workers/:id/days",
    "GET /workers/:id/days/:date",
    "GET /results/:id",
    "GET /shifts/:id",
    "GET /runs",
    "GET /runs/:id",
    "GET /fit-tests",
    "GET /findings",
    "GET /findings/:id",
    "GET /exports/year.csv",
    "GET /exports/year.zip",
    "GET /exports/year.xlsx",
    "GET /exports/year-dictionary.csv",
    "GET /exports/gaps",
    "GET /exports/gap-names",
  ],
  "enter-readings": ["POST /runs", "POST /imports/readings", "GET /imports/readings/template.csv"],
};

/** Each scope whose tokens open a route, as in "GET /areas". */
export const scopesOpening = (route: string): TokenScope[] =>
  TOKEN_SCOPES.filter((scope) => TOKEN_ROUTES[scope].includes(route));

/** Whether a token of these scopes may call a route, as in "GET /areas". */
export const opens = (scopes: readonly TokenScope[], route: string): boolean =>
  scopes.some((scope) => TOKEN_ROUTES[scope].includes(route));
