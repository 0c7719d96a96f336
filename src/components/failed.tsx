import { useLingui } from "@lingui/react";
import type { ReactNode } from "react";
import { ApiError } from "../lib/api";
import { TextButton } from "./link";
import { Problem } from "./problem";

/** A part that failed, in its own place: what failed, what still holds, and a way to try again. */
export function Failed({
  error,
  children,
  onRetry,
}: {
  error?: unknown;
  /** What failed and what still holds; else the error's own sentence. */
  children?: ReactNode;
  onRetry?: () => void;
}) {
  const { i18n } = useLingui();
  // What is not theirs stays so, however often it is asked for.
  const isRefused = error instanceof ApiError && error.status === 403;
  return (
    <p className="failed" role="alert">
      <span className="reversed">{i18n.t("Not shown")}</span>
      {children ?? <Problem error={error} />}{" "}
      {onRetry && !isRefused && <TextButton onClick={onRetry}>{i18n.t("Try again")}</TextButton>}
    </p>
  );
}
