import type { I18n } from "@lingui/core";
import type { Request, Response } from "express";
import { createI18n, LOCALES, type Locale, pickLocale } from "../../shared/i18n";
import { codeText } from "../../shared/problems/code-text";
import { issueText } from "../../shared/problems/issue-text";
import { recordingText } from "../../shared/recordings/recording-text";
import type { Problem } from "../../shared/schemas/problem";
import type { AppError } from "./errors";

/** The answer for what failed, in the reader's language: the request's own, else the signed-in user's. */
export async function answerProblem(
  error: AppError,
  request: Request,
  response: Response,
): Promise<void> {
  const locale = localeOf(request, response);
  const problem = describeProblem(
    await catalogue(locale),
    error,
    response.locals.requestId as string,
  );
  response
    .status(error.status)
    .setHeader("content-language", locale)
    .type("application/problem+json")
    .json(problem);
}

function localeOf(request: Request, response: Response): Locale {
  const wanted = request.get("accept-language");
  const spoken = wanted && wanted !== "*" && request.acceptsLanguages(...LOCALES);
  return pickLocale([spoken || "", String(response.locals.language ?? "")].filter(Boolean));
}

const catalogues = new Map<Locale, Promise<I18n>>();

function catalogue(locale: Locale): Promise<I18n> {
  const known = catalogues.get(locale) ?? createI18n(locale, ["base", "measuring", "mail"]);
  catalogues.set(locale, known);
  return known;
}

export function describeProblem(i18n: I18n, error: AppError, requestId: string): Problem {
  const { code, status, params, extra } = error;
  const issues = error.issues.map((issue) => ({
    ...issue,
    text: recordingText(i18n, issue.code, issue.params ?? {}) ?? issueText(i18n, issue),
  }));
  return {
    type: `/problems/${code}`,
    title: titleOf(i18n, status),
    status,
    detail: [detailOf(i18n, error), ...issues.map(issueLine)].join(" "),
    code,
    params,
    issues,
    requestId,
    ...extra,
  };
}

const issueLine = ({ path, text }: { path: readonly (string | number)[]; text: string }) =>
  path.length > 0 ? `${path.join(".")}: ${text}` : text;

/** The code's own sentence; what only a program can put right is told in the program's terms. */
function detailOf(i18n: I18n, { code, status, params }: AppError): string {
  switch (code) {
    case "csrf":
      return [
        codeText(i18n, code, params),
        i18n.t(
          "A program sends the value of the cookie dinward.csrf in the header x-csrf-token with every change.",
        ),
      ].join(" ");
    case "key-missing":
      return i18n.t(
        "A create needs the header Idempotency-Key: 8 to 200 characters, new for each one, the same when it is sent again.",
      );
    case "key-reused":
      return i18n.t("Another request was sent under this Idempotency-Key before. Take a new one.");
    case "revision-missing":
      return i18n.t("A change needs the header If-Match with the revision that you saw.");
    default:
      return codeText(i18n, code, params) ?? titleOf(i18n, status);
  }
}

function titleOf(i18n: I18n, status: number): string {
  switch (status) {
    case 401:
      return i18n.t("Not signed in");
    case 403:
      return i18n.t("Refused");
    case 404:
      return i18n.t("Not found");
    case 409:
      return i18n.t("It does not fit with what is stored");
    case 412:
      return i18n.t("Changed meanwhile");
    case 413:
      return i18n.t("Too large");
    case 422:
      return i18n.t("Something needs another look");
    case 428:
      return i18n.t("A header is missing");
    case 429:
      return i18n.t("Too many tries");
    case 503:
      return i18n.t("Not to be reached for the moment");
    default:
      return status >= 500 ? i18n.t("A mistake of the server") : i18n.t("The request is not right");
  }
}
