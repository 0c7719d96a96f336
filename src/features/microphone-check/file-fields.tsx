import { useLingui } from "@lingui/react";
import { Field } from "../../components/form";
import type { ChosenFiles, FilePlace } from "./check-draft";

export const ACCEPT = ".wav,audio/wav,audio/x-wav";

/** Choosers of the recordings, one by place. */
export function FileFields({
  places,
  isStereo,
  hasActivePart,
  errors,
  onChoose,
}: {
  places: readonly FilePlace[];
  isStereo: boolean;
  hasActivePart: boolean;
  errors: Readonly<Partial<Record<FilePlace, string>>>;
  onChoose: (place: FilePlace, file: File | null) => void;
}) {
  const { i18n } = useLingui();
  const passive = {
    offOutside: isStereo ? i18n.t("Recording") : i18n.t("Outside"),
    offInside: i18n.t("Inside"),
  };
  const active = {
    offOutside: isStereo ? i18n.t("Active part off") : i18n.t("Active part off, outside"),
    offInside: i18n.t("Active part off, inside"),
  };
  const labels: Record<keyof ChosenFiles, string> = {
    ...(hasActivePart ? active : passive),
    onOutside: isStereo ? i18n.t("Active part on") : i18n.t("Active part on, outside"),
    onInside: i18n.t("Active part on, inside"),
  };
  return places.map((place) => (
    <Field
      key={place}
      label={labels[place]}
      error={errors[place]}
      isOptional={place.startsWith("on")}
      note={
        place === "offOutside"
          ? i18n.t("WAV, 44.1 to 192 kHz, up to 128 MB. A minute of steady noise is best.")
          : place === "onOutside"
            ? i18n.t("For its true active attenuation on this ear.")
            : undefined
      }
    >
      {({ readOnly: _, ...wires }) => (
        <input
          {...wires}
          className="file-input"
          type="file"
          accept={ACCEPT}
          onChange={(event) => onChoose(place, event.target.files?.[0] ?? null)}
        />
      )}
    </Field>
  ));
}
