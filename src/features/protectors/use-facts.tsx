import { useLingui } from "@lingui/react";
import type { z } from "zod";
import type { ProtectorKind } from "../../../shared/acoustics/types";
import { Gear } from "../../../shared/schemas/fit";
import type { ProtectorUse } from "../../../shared/schemas/protector";
import { gearWord } from "../../../shared/words/register-words";
import { hasCushions, hasTips } from "./kinds";

/** Sizes, what it goes with, and when cushions and tips are due: what the certificate says beside its numbers. */
export function UseFacts({
  kind,
  data,
}: {
  kind: ProtectorKind;
  data: z.infer<typeof ProtectorUse>;
}) {
  const { i18n } = useLingui();
  const every = (days: number | null) =>
    days === null ? null : i18n.t("every {days, plural, one {# day} other {# days}}", { days });
  const { sizes, worksWith, cushionsEveryDays, tipsEveryDays } = data;
  const facts = [
    { key: "sizes", label: i18n.t("Sizes"), value: sizes.length > 0 ? sizes.join(", ") : null },
    ...Gear.options.map((gear) => ({
      key: gear,
      label: i18n.t("Goes with {gear}", { gear: gearWord(i18n, gear) }),
      value:
        worksWith[gear] === null
          ? null
          : worksWith[gear]
            ? i18n.t("yes")
            : i18n.t("no, not to be worn together"),
    })),
    ...(hasCushions(kind) || cushionsEveryDays !== null
      ? [{ key: "cushions", label: i18n.t("New cushions"), value: every(cushionsEveryDays) }]
      : []),
    ...(hasTips(kind) || tipsEveryDays !== null
      ? [{ key: "tips", label: i18n.t("New tips"), value: every(tipsEveryDays) }]
      : []),
  ];
  return (
    <dl className="facts">
      {facts.map(({ key, label, value }) => (
        <div key={key}>
          <dt>{label}</dt>
          <dd className={value === null ? "not-assessed" : undefined}>
            {value ?? i18n.t("not stated")}
          </dd>
        </div>
      ))}
    </dl>
  );
}
