import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import type { SurveyPlan } from "../../../shared/schemas/survey";
import { DateInput } from "../../components/date-input";
import { Field } from "../../components/form";
import { useLocale } from "../../lib/i18n";
import { messageUnder } from "./form-message";
import { type ReservationWarning, reservationWarnings } from "./reservation-warnings";
import type { SurveyFormState } from "./survey-form";

/** Instruments of the site, reserved by day, each with what speaks against it on those days. */
export function Reservations({
  form,
  instruments,
  surveyId,
}: {
  form: SurveyFormState;
  instruments: SurveyPlan["instruments"];
  surveyId: string | null;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const reservations = form.watch("reservations") ?? [];
  const [fromDate, toDate] = form.watch(["fromDate", "toDate"]);
  const put = (next: typeof reservations) =>
    form.setValue("reservations", next, {
      shouldDirty: true,
      shouldValidate: form.formState.isSubmitted,
    });
  const warningText = ({ code, date, surveyName }: ReservationWarning) => {
    switch (code) {
      case "calibration-failed":
        return i18n.t("failed its calibration on {date}", {
          date: formatShortDate(date ?? "", locale),
        });
      case "certificate-expires":
        return i18n.t("its certificate ends on {date}, before then", {
          date: formatShortDate(date ?? "", locale),
        });
      case "no-certificate-date":
        return i18n.t("nobody has said until when its certificate holds");
      case "reserved-already":
        return i18n.t("reserved by {survey} from {date} on", {
          survey: surveyName ?? "",
          date: formatShortDate(date ?? "", locale),
        });
    }
  };
  return (
    <Field
      label={i18n.t("Instruments")}
      isGroup
      isOptional
      error={messageUnder(form.formState.errors, "reservations")}
    >
      {() => (
        <ul className="survey-instruments">
          {instruments.map((instrument) => {
            const { id, name, serialNumber } = instrument;
            const own = reservations.find(({ instrumentId }) => instrumentId === id);
            const warnings = reservationWarnings(instrument, own ?? { fromDate, toDate }, surveyId);
            const label = `${name}, ${serialNumber}`;
            const replace = (change: Partial<NonNullable<typeof own>>) =>
              put(
                reservations.map((one) => (one.instrumentId === id ? { ...one, ...change } : one)),
              );
            return (
              <li key={id}>
                <label className="choice">
                  <input
                    type="checkbox"
                    checked={own !== undefined}
                    onChange={(event) =>
                      put(
                        event.target.checked
                          ? [...reservations, { instrumentId: id, fromDate, toDate }]
                          : reservations.filter(({ instrumentId }) => instrumentId !== id),
                      )
                    }
                  />
                  <span>
                    {label}
                    {warnings.length > 0 && (
                      <span className={`block ${own ? "is-fault" : "beneath"}`}>
                        {warnings.map(warningText).join("; ")}
                      </span>
                    )}
                  </span>
                </label>
                {own && (
                  <span className="survey-days">
                    <DateInput
                      aria-label={i18n.t("{instrument} from", { instrument: label })}
                      value={own.fromDate}
                      onChoose={(date) => replace({ fromDate: date })}
                    />
                    <span>{i18n.t("to")}</span>
                    <DateInput
                      aria-label={i18n.t("{instrument} to", { instrument: label })}
                      value={own.toDate}
                      onChoose={(date) => replace({ toDate: date })}
                    />
                  </span>
                )}
              </li>
            );
          })}
          {instruments.length === 0 && (
            <li className="beneath">{i18n.t("There is no instrument at this site.")}</li>
          )}
        </ul>
      )}
    </Field>
  );
}
