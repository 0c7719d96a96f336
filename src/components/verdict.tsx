import { useLingui } from "@lingui/react";
import type { ReactNode } from "react";
import type { Verdict as VerdictCode } from "../../shared/acoustics/types";
import { verdictWord } from "../../shared/day/words";

export { verdictWord };

/** The upright is the criterion; the mark stands under it, over it or across it. */
export function VerdictShape({ verdict }: { verdict: VerdictCode }) {
  return (
    <svg className="verdict-shape" width="16" height="14" viewBox="0 0 16 14" aria-hidden="true">
      {verdict === "under" && (
        <>
          <circle cx="5.2" cy="7" r="3.7" fill="none" stroke="currentColor" strokeWidth="1.8" />
          <path d="M12.5 1.2v11.6" stroke="currentColor" strokeWidth="1.4" />
        </>
      )}
      {verdict === "over" && (
        <>
          <path d="M2.6 1v12" stroke="currentColor" strokeWidth="1.4" />
          <path d="M5 2.2 14.6 7 5 11.8Z" fill="currentColor" />
        </>
      )}
      {verdict === "cant-tell-yet" && (
        <>
          <path
            d="M7.5 1.4 13 7l-5.5 5.6L2 7Z"
            fill="none"
            stroke="currentColor"
            strokeWidth="1.5"
          />
          <path d="M7.5 1.4 13 7l-5.5 5.6Z" fill="currentColor" />
        </>
      )}
      {verdict === "not-assessed" && (
        <circle
          cx="7.5"
          cy="7"
          r="5.5"
          fill="none"
          stroke="currentColor"
          strokeWidth="1.4"
          strokeDasharray="2.2 2.12"
        />
      )}
    </svg>
  );
}

/**
 * Shape and word. At the ear, Over is a reversed block; `isQuiet` is for the line without protection, where Over is a
 * duty and no alarm. `children` replaces the word where the sentence says more ("Over 85, clearly").
 */
export function Verdict({
  verdict,
  isQuiet = false,
  children,
}: {
  verdict: VerdictCode;
  isQuiet?: boolean;
  children?: ReactNode;
}) {
  const { i18n } = useLingui();
  return (
    <span className={`verdict is-${verdict}${isQuiet ? " is-quiet" : ""}`}>
      <VerdictShape verdict={verdict} />
      <span className="verdict-word">{children ?? verdictWord(i18n, verdict)}</span>
    </span>
  );
}
