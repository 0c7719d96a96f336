import type { I18n } from "@lingui/core";
import { bandBelow } from "../../shared/acoustics/protection/adequacy";
import { hasToPass } from "../../shared/acoustics/protection/fit-rating";
import type { ProtectorKind } from "../../shared/acoustics/types";
import { protectorWordText } from "../../shared/day/words";
import { formatDate, formatShortDate } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import { formatLevel, formatLimit } from "../../shared/format/level";
import { createI18n, isLocale, type Locale } from "../../shared/i18n";
import { isolate } from "../../shared/i18n/isolate";
import { ruleSetVersion } from "../../shared/rule-sets";
import type { IssueSlip } from "../../shared/schemas/choice";
import { protectorKindWord } from "../../shared/words/register-words";
import { only } from "../lib/only";
import type { Actor } from "../lib/policy";
import { issueSlips } from "../queries/issue-slips";
import type { Block, Cell, Report, Sheet } from "./blocks";
import { frameOf, originOf, type ReportOrigin } from "./frame";
import { instructionsFor, instructionsForBoth } from "./instructions";
import { stripPicture } from "./strip-picture";

type Device = IssueSlip["protectors"][number];

const nameOf = ({ name, outerName }: Device) =>
  [name, outerName]
    .filter((part) => part !== null)
    .map(isolate)
    .join(" + ");

/** A device that is worn for several uses is shown once. */
const oncePerDevice = (devices: readonly Device[]) =>
  devices.filter((device, at) => devices.findIndex((one) => nameOf(one) === nameOf(device)) === at);

/**
 * What goes along with protectors, to be signed: pages for each worker, in the worker's language or the one asked for, with the
 * levels and words of the answer of the same request as JSON.
 *
 * @throws AppError not-found, where the actor doesn't see one of the workers.
 */
export async function issueSlipsReport(
  actor: Actor,
  workerIds: readonly string[],
  language?: Locale,
): Promise<Report> {
  const slips = await issueSlips(actor, workerIds);
  const origins = new Map<string, ReportOrigin>();
  const words = new Map<Locale, I18n>();
  const sheets: (Sheet & Pick<Report, "madeAt" | "author">)[] = [];
  for (const slip of slips) {
    const { siteId, language: own } = slip.worker;
    const locale = language ?? (isLocale(own) ? own : "en");
    const origin = origins.get(siteId) ?? (await originOf(actor.organizationId, siteId));
    const i18n = words.get(locale) ?? (await createI18n(locale));
    origins.set(siteId, origin);
    words.set(locale, i18n);
    sheets.push({
      ...frameOf(i18n, locale, origin),
      ...slipOf(i18n, locale, slip, actor.name),
    });
  }
  const [first, ...more] = sheets;
  return { ...only(first ? [first] : []), more };
}

function slipOf(
  i18n: I18n,
  locale: Locale,
  slip: IssueSlip,
  printedBy: string,
): Pick<Sheet, "isLarge" | "title" | "lead" | "blocks"> {
  const { worker, protectors } = slip;
  const governing = ruleSetVersion(slip.ruleSetKey, slip.ruleSetVersion);
  return {
    isLarge: true,
    title: i18n.t("Your hearing protectors"),
    lead: [
      isolate(worker.siteName),
      i18n.t("as of {date}", { date: formatDate(slip.date, locale) }),
    ].join(", "),
    blocks: [
      {
        kind: "facts",
        rows: [
          [i18n.t("Worker"), isolate(worker.name)],
          [i18n.t("Number"), worker.employeeNumber],
          [i18n.t("Crew"), worker.crewName === null ? i18n.t("none") : isolate(worker.crewName)],
          [i18n.t("Printed by"), isolate(printedBy)],
        ],
      },
      ...devices(i18n, locale, slip),
      { kind: "heading", text: i18n.t("Shown and understood") },
      {
        kind: "checks",
        rows: [
          ...oncePerDevice(protectors).flatMap((device) =>
            shown(i18n, locale, device).map((text) => ({
              text: protectors.length > 1 ? `${nameOf(device)}: ${text}` : text,
            })),
          ),
          {
            text: i18n.t(
              "Free of charge, and so is what replaces it when it is worn out, lost or broken",
            ),
          },
        ],
      },
      {
        kind: "blanks",
        roomPt: 54,
        blanks: [
          { label: i18n.t("Received, worker") },
          { label: i18n.t("Handed out and shown") },
          { label: i18n.t("Date") },
        ],
      },
      {
        kind: "text",
        isQuiet: true,
        text: [
          ...(governing
            ? [
                i18n.t("{title}, rule set version {version}.", {
                  title: i18n._(governing.title),
                  version: governing.version,
                }),
              ]
            : []),
          i18n.t("An aid to screening. A qualified hygienist decides."),
        ].join(" "),
      },
    ],
  };
}

function devices(i18n: I18n, locale: Locale, { protectors, actionDb }: IssueSlip): Block[] {
  const band = actionDb === null ? null : bandBelow(actionDb);
  return [
    {
      kind: "table",
      summary: i18n.t("Your hearing protectors"),
      empty: i18n.t("No protector is assigned to you today."),
      columns: [
        { head: i18n.t("Protector, and where to wear it"), width: 34 },
        { head: `${i18n.t("At the ear while worn, and outside")}, dB`, width: 44 },
        { head: i18n.t("While worn"), width: 22 },
      ],
      rows: protectors.map((device) => [
        whichAndWhere(i18n, locale, device),
        levels(i18n, locale, device, actionDb),
        {
          isStrong: "first line",
          lines: [
            device.word === null ? i18n.t("Not assessed") : protectorWordText(i18n, device.word),
            ...(device.taskName === null
              ? []
              : [
                  actionDb === null && device.word !== null
                    ? i18n.t("over the shift; loudest in {task}", {
                        task: isolate(device.taskName),
                      })
                    : isolate(device.taskName),
                ]),
          ],
        },
      ]),
    },
    ...(band === null || protectors.length === 0
      ? []
      : [
          {
            kind: "text",
            isQuiet: true,
            text: i18n.t(
              "Brackets: the target, {low} to {high} dB; above it its good part, {goodLow} to {goodHigh}. Triangle: at the ear while worn.",
              {
                low: formatLimit(band.lowDb, locale),
                high: formatLimit(band.highDb, locale),
                goodLow: formatLimit(band.goodLowDb, locale),
                goodHigh: formatLimit(band.goodHighDb, locale),
              },
            ),
          } as const,
        ]),
  ];
}

const whichAndWhere = (i18n: I18n, locale: Locale, device: Device): Cell => ({
  isStrong: "first line",
  lines: [
    nameOf(device),
    ...(device.size === null ? [] : [i18n.t("size {size}", { size: device.size })]),
    device.useName === null ? i18n.t("everywhere in noise") : isolate(device.useName),
    device.issuedOn === null
      ? i18n.t("assigned, not handed out yet")
      : i18n.t("handed out {date}", { date: formatShortDate(device.issuedOn, locale) }),
    fitWords(i18n, locale, device),
  ],
});

function fitWords(i18n: I18n, locale: Locale, { fit, kind, outerKind }: Device): string {
  if (fit === null)
    return [kind, outerKind]
      .filter((one) => one !== null)
      .map((one) => protectorKindWord(i18n, one as ProtectorKind))
      .join(" + ");
  const date = formatShortDate(fit.testedOn, locale);
  if (fit.needDb !== null && !hasToPass(fit.needDb))
    return i18n.t("Fit measured {date}: nothing to pass", { date });
  if (fit.hasPassed === null) return i18n.t("Fit measured {date}", { date });
  return fit.hasPassed
    ? i18n.t("Fit checked {date}: fits", { date })
    : i18n.t("Fit checked {date}: does not fit, to be fitted anew", { date });
}

function levels(
  i18n: I18n,
  locale: Locale,
  { outsideDb, wornDb }: Device,
  actionDb: number | null,
): string | Cell {
  if (outsideDb === null) return i18n.t("no noise of its use is known");
  const outside = formatLevel(outsideDb, locale);
  return {
    picture: stripPicture(locale, { outsideDb, wornDb, actionDb }),
    lines: [
      wornDb === null
        ? i18n.t("at the ear not assessed, outside {outside}", { outside })
        : i18n.t("at the ear {atEar}, outside {outside}", {
            atEar: formatLevel(wornDb, locale),
            outside,
          }),
    ],
  };
}

/** What is shown to whoever gets the device, and what is due on it. */
function shown(i18n: I18n, locale: Locale, device: Device): string[] {
  const { kind, outerKind, batteryMin, cushionsDueOn, tipsDueOn } = device;
  return [
    ...(outerKind === null || device.outerName === null
      ? instructionsFor(i18n, kind as ProtectorKind)
      : instructionsForBoth(
          i18n,
          { kind: kind as ProtectorKind, name: isolate(device.name) },
          { kind: outerKind as ProtectorKind, name: isolate(device.outerName) },
        )),
    ...(batteryMin === null
      ? []
      : [
          i18n.t("Charged before the shift: the battery lasts {time}", {
            time: formatDuration(batteryMin, locale),
          }),
        ]),
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
