import { useLingui } from "@lingui/react";
import { lazy, Suspense, useEffect, useState } from "react";
import { Button } from "../../components/button";
import { useTypedText } from "../../lib/keep-typed";
import { useMoveFocus } from "../../lib/move-focus";

const loadForm = () => import("./report-form");
const ReportForm = lazy(() => loadForm().then(({ ReportForm }) => ({ default: ReportForm })));

/** The way to a word to the safety officer; what is written there stands open again until it has arrived. */
export function ReportProblem({ workerId }: { workerId: string }) {
  const { i18n } = useLingui();
  const [text, setText] = useTypedText(`problem ${workerId}`);
  const [open, setOpen] = useState<"asked" | "kept" | null>(text === "" ? null : "kept");
  const [isSent, setIsSent] = useState(false);
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  // After the page itself, so that it is there where the connection is not. A failure shows when it is asked for.
  useEffect(() => void loadForm().catch(() => undefined), []);

  const button = (
    <Button
      kind="big"
      size="worker"
      onClick={() => {
        setOpen("asked");
        setIsSent(false);
      }}
    >
      {i18n.t("Report a problem")}
    </Button>
  );
  return (
    <div ref={place} className="contents">
      {open ? (
        <Suspense fallback={button}>
          <ReportForm
            workerId={workerId}
            text={text}
            isAsked={open === "asked"}
            onText={setText}
            onSent={() => {
              setText("");
              setOpen(null);
              setIsSent(true);
              moveFocus("button");
            }}
            onCancel={() => {
              setOpen(null);
              moveFocus("button");
            }}
          />
        </Suspense>
      ) : (
        button
      )}
      <p className="me-note" role="status">
        {isSent && i18n.t("Thank you. Your safety officer has it.")}
      </p>
    </div>
  );
}
