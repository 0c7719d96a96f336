import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { pooledRatings } from "../../../shared/acoustics/protection/ratings";
import { formatInstant, formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import type { CombinationView, ProtectorView } from "../../../shared/schemas/protector";
import { Button } from "../../components/button";
import { DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextButton } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { CombinationForm } from "./combination-form";
import { protectorQueries } from "./queries";

/** What this model and another take off when they are worn together: data in force, those before, and new ones. */
export function Combinations({
  protector,
  mayChange,
  timeZone,
  today,
  onSaved,
}: {
  protector: Pick<ProtectorView, "id" | "name" | "kind">;
  mayChange: boolean;
  timeZone: string;
  today: string;
  onSaved: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const list = useQuery(protectorQueries.combinations(protector.id));
  const [open, setOpen] = useState<"new" | CombinationView | null>(null);
  const rows = list.data?.rows ?? [];
  const figures = (values: readonly (number | null)[]) =>
    values.map((value) => formatLevel(value, locale)).join(" ");
  return (
    <>
      <DataTable<CombinationView>
        caption={i18n.t("Test data of two worn together")}
        state={list.isSuccess ? "ready" : list.isError ? "failed" : "loading"}
        error={list.error}
        onRetry={() => void list.refetch()}
        rows={rows}
        rowKey={({ id }) => id}
        groupOf={({ innerModelId, outerModelId, innerName, outerName }) => ({
          key: `${innerModelId} ${outerModelId}`,
          label: i18n.t("{inner} under {outer}", { inner: innerName, outer: outerName }),
        })}
        isSelected={({ isInForce }) => isInForce}
        isTwoLine
        stacksOnPhone
        empty={
          <Empty title={i18n.t("Not tested together with another one.")}>
            {i18n.t(
              "Worn under or over another without such data it is not assessed, or gets the flat addition of the rule.",
            )}
          </Empty>
        }
        columns={[
          {
            id: "from",
            head: i18n.t("Holds from"),
            isRowHead: true,
            cell: ({ effectiveFrom, isInForce }) => (
              <span className="two-lines">
                {formatShortDate(effectiveFrom, locale)}
                <span className="beneath">{isInForce ? i18n.t("in force") : ""}</span>
              </span>
            ),
          },
          {
            id: "bands",
            head: i18n.t("Mean, and deviation, 63 Hz to 8 kHz"),
            unit: "dB",
            cell: ({ bands }) => (
              <span className="two-lines figure-row">
                {figures(bands.meanDb)}
                <span className="beneath">{figures(bands.sdDb)}</span>
              </span>
            ),
          },
          {
            id: "snr",
            head: i18n.t("SNR from them"),
            unit: "dB",
            kind: "figure",
            cell: ({ bands }) => formatLevel(pooledRatings(bands).snrDb, locale),
          },
          {
            id: "why",
            head: i18n.t("Reason, and who entered it"),
            cell: ({ reason, authorName, createdAt }) => (
              <span className="two-lines">
                {reason ?? i18n.t("first data")}
                <span className="beneath">
                  {[authorName, formatInstant(createdAt, timeZone, locale)]
                    .filter(Boolean)
                    .join(", ")}
                </span>
              </span>
            ),
          },
          ...(mayChange
            ? [
                {
                  id: "new",
                  head: <span className="sr-only">{i18n.t("What can be done")}</span>,
                  kind: "right" as const,
                  cell: (one: CombinationView) =>
                    one.isInForce && (
                      <TextButton
                        aria-label={i18n.t("New data of {inner} under {outer}", {
                          inner: one.innerName,
                          outer: one.outerName,
                        })}
                        onClick={() => setOpen(one)}
                      >
                        {i18n.t("New data")}
                      </TextButton>
                    ),
                },
              ]
            : []),
        ]}
      />
      {mayChange && open === null && (
        <p className="after-table">
          <Button onClick={() => setOpen("new")}>{i18n.t("Enter data of a pair")}</Button>
        </p>
      )}
      {open !== null && list.isSuccess && (
        <CombinationForm
          key={open === "new" ? "new" : open.id}
          protector={protector}
          known={rows}
          from={open === "new" ? null : open}
          today={today}
          onLeave={() => setOpen(null)}
          onSaved={() => {
            setOpen(null);
            onSaved();
          }}
        />
      )}
    </>
  );
}
