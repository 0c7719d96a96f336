import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { lazy, Suspense } from "react";
import type { ProtectorWord } from "../../../shared/acoustics/types";
import { formatDate } from "../../../shared/format/date";
import { Empty } from "../../components/empty";
import { protectorWordText } from "../../components/protector-word";
import { useLocale } from "../../lib/i18n";
import type { OwnProtector } from "./own-protectors";
import type { OwnDay } from "./queries";
import { nameOf } from "./what-to-do";

/** To a worker a fault is a sentence, not a word of the scale. */
function wordText(i18n: I18n, word: ProtectorWord): string {
  if (word === "too-little") return i18n.t("Protects too little");
  if (word === "too-much") return i18n.t("Protects too much");
  return protectorWordText(i18n, word);
}

/** After the page itself: what it says comes from elsewhere and is not what the page is opened for. */
const OwnFit = lazy(() => import("./own-fits").then(({ OwnFit }) => ({ default: OwnFit })));
const AcknowledgeOwn = lazy(() =>
  import("./own-fits").then(({ AcknowledgeOwn }) => ({ default: AcknowledgeOwn })),
);

export function MyProtectors({
  workerId,
  protectors,
  lastDay,
}: {
  workerId: string;
  protectors: readonly OwnProtector[];
  lastDay: OwnDay | null;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (protectors.length === 0) return <Empty title={i18n.t("None is assigned to you.")} />;
  return (
    <>
      <ul className="me-protectors">
        {protectors.map((one) => {
          const word =
            lastDay?.wordsByUse.find(({ assignmentId }) => assignmentId === one.id)?.word ?? null;
          const isFault = word === "too-little" || word === "too-much";
          return (
            <li key={one.id}>
              <p className="me-protector">
                <span>
                  <b>{nameOf(i18n, one)}</b>
                  {", "}
                  {one.useName ?? i18n.t("everywhere in noise")}
                </span>
                {word && (
                  <span className={isFault ? "is-fault" : undefined}>{wordText(i18n, word)}</span>
                )}
              </p>
              <p className="me-note">
                {one.toDate === null
                  ? i18n.t("Yours since {date}.", { date: formatDate(one.fromDate, locale) })
                  : i18n.t("Yours since {date}, until {end}.", {
                      date: formatDate(one.fromDate, locale),
                      end: formatDate(one.toDate, locale),
                    })}
              </p>
              {one.outerName === null && (
                <p className="me-note">
                  <Suspense fallback={<>&nbsp;</>}>
                    <OwnFit workerId={workerId} protector={one} />
                  </Suspense>
                </p>
              )}
            </li>
          );
        })}
      </ul>
      <Suspense fallback={null}>
        <AcknowledgeOwn workerId={workerId} />
      </Suspense>
    </>
  );
}
