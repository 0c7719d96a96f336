/**
 * npm run evaluate -- FILE
 * Computes the day that FILE asks for, or each of an array of them, offline: the answers go to the standard output as
 * JSON, in the shape of the API's own. "-" reads the standard input. Bad input is one message and exit code 1.
 */
import { readFileSync } from "node:fs";
import type { z } from "zod";
import { evaluateRequest, RuleSetNotInForce } from "../shared/day/evaluate-request";
import { EvaluateInput } from "../shared/schemas/evaluation";
import { Failure, runMain } from "./lib/failure.mjs";

function readRequests(file: string): unknown {
  let text: string;
  try {
    text = readFileSync(file === "-" ? 0 : file, "utf8");
  } catch (error) {
    throw new Failure(`${file} can't be read: ${(error as NodeJS.ErrnoException).code}`);
  }
  try {
    return JSON.parse(text);
  } catch (error) {
    throw new Failure(`${file} is no JSON: ${(error as Error).message}`);
  }
}

function describe({ path, message, ...found }: z.core.$ZodIssue): string {
  const { code } = ("params" in found ? found.params : {}) as { code?: string };
  return `  ${path.map(String).join(".") || "(whole)"}: ${code ?? message}`;
}

function evaluateOne(request: unknown, name: string) {
  const parsed = EvaluateInput.safeParse(request);
  if (!parsed.success) {
    throw new Failure(
      `${name} can't be evaluated:\n${parsed.error.issues.map(describe).join("\n")}`,
    );
  }
  try {
    return evaluateRequest(parsed.data);
  } catch (error) {
    if (!(error instanceof RuleSetNotInForce)) throw error;
    throw new Failure(`${name} can't be evaluated:\n  ${error.path.join(".")}: ${error.message}`);
  }
}

await runMain(async () => {
  const [file, ...more] = process.argv.slice(2);
  if (!file || more.length > 0) throw new Failure("say one file:  npm run evaluate -- FILE");
  const asked = readRequests(file);
  const answer = Array.isArray(asked)
    ? asked.map((request, index) => evaluateOne(request, `Request ${index + 1} of ${file}`))
    : evaluateOne(asked, file);
  process.stdout.write(`${JSON.stringify(answer, null, 2)}\n`);
});
