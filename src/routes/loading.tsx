import { useLingui } from "@lingui/react";
import { useEffect, useState } from "react";

/** A page is there sooner; only where something is slow is there anything to say. */
const SLOW_MS = 3_000;

/** Nothing that would jump; what follows brings its own frame. A server that does not answer is said to be slow. */
export function Loading() {
  const { i18n } = useLingui();
  const [isSlow, setSlow] = useState(false);
  useEffect(() => {
    const timer = setTimeout(() => setSlow(true), SLOW_MS);
    return () => clearTimeout(timer);
  }, []);
  return (
    <div className="page" aria-busy="true">
      <p className="page-body" role="status">
        {isSlow && i18n.t("The server has not answered yet. This page goes on when it does.")}
      </p>
    </div>
  );
}
