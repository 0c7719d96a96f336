import type { SurveyPlan } from "../../../shared/schemas/survey";

type Instrument = SurveyPlan["instruments"][number];

export interface ReservationWarning {
  readonly code:
    | "calibration-failed"
    | "certificate-expires"
    | "no-certificate-date"
    | "reserved-already";
  /** ISO date. */
  readonly date: string | null;
  readonly surveyName: string | null;
}

/** What speaks against an instrument on these days: it failed its calibration, its certificate ends before them, or another survey has it. */
export function reservationWarnings(
  { calibrationDueOn, calibrationFailedOn, reservedBy }: Instrument,
  days: { readonly fromDate: string; readonly toDate: string },
  ownSurveyId: string | null,
): ReservationWarning[] {
  const warnings: ReservationWarning[] = [];
  if (calibrationFailedOn !== null)
    warnings.push({ code: "calibration-failed", date: calibrationFailedOn, surveyName: null });
  else if (calibrationDueOn === null)
    warnings.push({ code: "no-certificate-date", date: null, surveyName: null });
  else if (calibrationDueOn < days.toDate)
    warnings.push({ code: "certificate-expires", date: calibrationDueOn, surveyName: null });
  for (const { surveyId, surveyName, fromDate, toDate } of reservedBy) {
    const isOther = surveyId !== ownSurveyId;
    if (isOther && fromDate <= days.toDate && toDate >= days.fromDate)
      warnings.push({ code: "reserved-already", date: fromDate, surveyName });
  }
  return warnings;
}
