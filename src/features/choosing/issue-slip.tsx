import { useLingui } from "@lingui/react";
import { hasToPass } from "../../../shared/acoustics/protection/fit-rating";
import type { ProtectorKind } from "../../../shared/acoustics/types";
import { formatDate, formatShortDate } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel, formatLimit } from "../../../shared/format/level";
import { ruleSetVersion } from "../../../shared/rule-sets";
import type { IssueSlip } from "../../../shared/schemas/choice";
import { DropStrip } from "../../components/drop-strip";
import { levelX, STRIP_FROM_DB, STRIP_TO_DB } from "../../components/drop-strip-geometry";
import { ProtectorWord } from "../../components/protector-word";
import { bandBelow } from "../../components/strip-of-day";
import { useLocale } from "../../lib/i18n";
import { protectorKindWord } from "../../lib/register-words";
import { instructionsFor } from "./instructions";

type Device = IssueSlip["protectors"][number];

const nameOf = ({ name, outerName }: Device) => [name, outerName].filter(Boolean).join(" + ");

/** A device that is worn for several uses is shown once. */
const oncePerDevice = (devices: readonly Device[]) =>
  devices.filter((device, at) => devices.findIndex((one) => nameOf(one) === nameOf(device)) === at);

/** A page of A4 for a worker: what is worn where, what was shown, and who signed. */
export function IssueSlipPage({ slip, issuedBy }: { slip: IssueSlip; issuedBy: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { worker, protectors, actionDb } = slip;
  const governing = ruleSetVersion(slip.ruleSetKey, slip.ruleSetVersion);
  const facts = [
    [i18n.t("Worker"), worker.name],
    [i18n.t("Number"), worker.employeeNumber],
    [i18n.t("Crew"), worker.crewName ?? i18n.t("none")],
    [i18n.t("Printed by"), issuedBy],
  ];
  return (
    <article className="field-sheet issue-slip" lang={locale} aria-label={worker.name}>
      <header className="field-sheet-head">
        <b>Dinward</b>
        <span>
          {[worker.siteName, i18n.t("as of {date}", { date: formatDate(slip.date, locale) })].join(
            ", ",
          )}
        </span>
      </header>
      <h2>{i18n.t("Your hearing protectors")}</h2>
      <dl className="field-sheet-facts">
        {facts.map(([label, value]) => (
          <div key={label}>
            <dt>{label}</dt>
            <dd>{value}</dd>
          </div>
        ))}
      </dl>
      {protectors.length === 0 ? (
        <p>{i18n.t("No protector is assigned to you today.")}</p>
      ) : (
        <table className="slip-devices">
          <thead>
            <tr>
              <th scope="col">{i18n.t("Protector, and where to wear it")}</th>
              <th scope="col">
                {i18n.t("At the ear while worn, and outside")} <i>dB</i>
                <Scale />
              </th>
              <th scope="col">{i18n.t("While worn")}</th>
            </tr>
          </thead>
          <tbody>
            {protectors.map((device) => (
              <tr key={device.assignmentId}>
                <th scope="row">
                  <b>{nameOf(device)}</b>
                  {device.size !== null && (
                    <span className="block">{i18n.t("size {size}", { size: device.size })}</span>
                  )}
                  <span className="block">{device.useName ?? i18n.t("everywhere in noise")}</span>
                  <span className="block">
                    {device.issuedOn === null
                      ? i18n.t("assigned, not handed out yet")
                      : i18n.t("handed out {date}", {
                          date: formatShortDate(device.issuedOn, locale),
                        })}
                  </span>
                  <span className="block">{fitWords(device)}</span>
                </th>
                <td>
                  <Strip device={device} actionDb={actionDb} />
                </td>
                <td>
                  <ProtectorWord word={device.word} beneath={device.taskName ?? undefined} />
                </td>
              </tr>
            ))}
          </tbody>
        </table>
      )}
      {actionDb !== null && protectors.length > 0 && (
        <p className="slip-legend">
          {i18n.t(
            "Brackets: the target, {low} to {high} dB; above it its good part, {goodLow} to {goodHigh}. Triangle: at the ear while worn.",
            {
              low: formatLimit(actionDb - 15, locale),
              high: formatLimit(actionDb, locale),
              goodLow: formatLimit(actionDb - 10, locale),
              goodHigh: formatLimit(actionDb - 5, locale),
            },
          )}
        </p>
      )}
      <h3>{i18n.t("Shown and understood")}</h3>
      <ul className="slip-checks">
        {oncePerDevice(protectors).flatMap((device) =>
          [
            ...instructionsFor(i18n, device.kind as ProtectorKind),
            ...(device.batteryMin === null
              ? []
              : [
                  i18n.t("Charged before the shift: the battery lasts {time}", {
                    time: formatDuration(device.batteryMin, locale),
                  }),
                ]),
            ...partsDue(device),
          ].map((text) => (
            <li key={`${device.assignmentId} ${text}`}>
              <span className="slip-box" aria-hidden="true" />
              {protectors.length > 1 ? `${nameOf(device)}: ${text}` : text}
            </li>
          )),
        )}
        <li>
          <span className="slip-box" aria-hidden="true" />
          {i18n.t("Free of charge, and so is what replaces it when it is worn out, lost or broken")}
        </li>
      </ul>
      <div className="slip-signatures">
        <span>{i18n.t("Received, worker")}</span>
        <span>{i18n.t("Handed out and shown")}</span>
        <span>{i18n.t("Date")}</span>
      </div>
      <footer className="field-sheet-foot">
        <span>
          {governing &&
            i18n.t("{title}, rule set version {version}.", {
              title: i18n._(governing.title),
              version: governing.version,
            })}
        </span>
        <span>{i18n.t("An aid to screening. A qualified hygienist decides.")}</span>
      </footer>
    </article>
  );

  function fitWords({ fit, kind }: Device): string {
    if (fit === null) return protectorKindWord(i18n, kind as ProtectorKind);
    const date = formatShortDate(fit.testedOn, locale);
    if (fit.needDb !== null && !hasToPass(fit.needDb))
      return i18n.t("Fit measured {date}: nothing to pass", { date });
    if (fit.hasPassed === null) return i18n.t("Fit measured {date}", { date });
    return fit.hasPassed
      ? i18n.t("Fit checked {date}: fits", { date })
      : i18n.t("Fit checked {date}: does not fit, to be fitted anew", { date });
  }

  function partsDue({ cushionsDueOn, tipsDueOn }: Device): string[] {
    return [
      ...(cushionsDueOn === null
        ? []
        : [
            i18n.t("Cushions new on {date}; before that if they are hard or torn", {
              date: formatShortDate(cushionsDueOn, locale),
            }),
          ]),
      ...(tipsDueOn === null
        ? []
        : [
            i18n.t("Tips new on {date}; before that if they are hard or torn", {
              date: formatShortDate(tipsDueOn, locale),
            }),
          ]),
    ];
  }
}

const STRIP_WIDTH_PX = 290;

/** The numbers of the strips' scale, as far apart as on them. */
function Scale() {
  const levelsDb = [];
  for (let levelDb = STRIP_FROM_DB; levelDb <= STRIP_TO_DB; levelDb += 10) levelsDb.push(levelDb);
  return (
    <svg className="slip-scale" width={STRIP_WIDTH_PX} height={16} aria-hidden="true">
      {levelsDb.map((levelDb) => (
        <text key={levelDb} x={levelX(levelDb, STRIP_WIDTH_PX)} y={13} textAnchor="middle">
          {levelDb}
        </text>
      ))}
    </svg>
  );
}

function Strip({ device, actionDb }: { device: Device; actionDb: number | null }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { outsideDb, wornDb, word } = device;
  if (outsideDb === null)
    return <span className="not-assessed">{i18n.t("no noise of its use is known")}</span>;
  return (
    <>
      <DropStrip
        variant="print"
        widthPx={STRIP_WIDTH_PX}
        k={1.5}
        isHidden
        outsideDb={outsideDb}
        outsideUDb={null}
        outsideBound="exact"
        atEarDb={wornDb}
        atEarBound="exact"
        atEarUDb={null}
        atEarActiveDb={null}
        atEarAsWorkedDb={null}
        whileWornDb={wornDb}
        limits={[]}
        targetBand={actionDb === null ? null : bandBelow(actionDb)}
        isExpected={false}
        hasProtector="yes"
        word={word}
        verdict={null}
      />
      <span className="block">
        {wornDb === null
          ? i18n.t("at the ear not assessed, outside {outside}", {
              outside: formatLevel(outsideDb, locale),
            })
          : i18n.t("at the ear {atEar}, outside {outside}", {
              atEar: formatLevel(wornDb, locale),
              outside: formatLevel(outsideDb, locale),
            })}
      </span>
    </>
  );
}
