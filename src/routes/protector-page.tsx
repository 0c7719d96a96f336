import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useParams } from "react-router-dom";
import { formatDate, formatInstant, formatShortDate, localDateOf } from "../../shared/format/date";
import { protectorKindWord } from "../../shared/words/register-words";
import { Button } from "../components/button";
import { RecomputeProgress } from "../components/change-preview";
import { DataTable } from "../components/data-table";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { AtEar } from "../features/at-ear/at-ear";
import { ActivePart } from "../features/protectors/active-part";
import { AttenuationByBand } from "../features/protectors/attenuation";
import { Combinations } from "../features/protectors/combinations";
import { DataSheets } from "../features/protectors/data-sheets";
import { LabelAndTestData } from "../features/protectors/label-and-test-data";
import { labelledData } from "../features/protectors/labelled-data";
import { ProtectorDataForm } from "../features/protectors/protector-data-form";
import { ProtectorHeadForm } from "../features/protectors/protector-head-form";
import { protectorQueries } from "../features/protectors/queries";
import { UseFacts } from "../features/protectors/use-facts";
import { useUser } from "../features/session/session";
import { useEditParam } from "../lib/edit-param";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/protectors.css";

/** One protector: what its cup or plug takes away, its active part apart, and how its data came about. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id = "" } = useParams();
  const { sites } = useUser();
  const timeZone = sites[0]?.timeZone ?? "UTC";
  const { editing, edit, close } = useEditParam();
  const [isChanged, setIsChanged] = useState(false);
  const { data: protector, error, refetch } = useQuery(protectorQueries.one(id));
  const way = <TextLink to={paths.protectors}>{i18n.t("Protectors")}</TextLink>;
  if (!protector)
    return (
      <PageBody>
        <PageHead way={way} title={error ? i18n.t("Protector") : " "} />
        {error && <Failed error={error} onRetry={() => void refetch()} />}
      </PageBody>
    );
  const { data } = protector;
  const numbers = labelledData(i18n, data, locale);
  const mayChange = protector.can.change;
  const today = localDateOf(new Date().toISOString(), timeZone);
  return (
    <>
      <PageBody
        margin={
          <>
            <MarginNote title={i18n.t("On the label")} isRuled>
              {numbers.length > 0 ? (
                <Leaders
                  items={numbers.map(({ key, label, value, isLevel }) => ({
                    key,
                    label,
                    value: isLevel ? `${value} dB` : value,
                  }))}
                />
              ) : (
                <p className="not-assessed">{i18n.t("no single number stated")}</p>
              )}
            </MarginNote>
            <MarginNote title={i18n.t("Assigned today")}>
              <p>
                {i18n.t("{count, plural, =0 {to nobody} one {to # person} other {to # people}}", {
                  count: protector.wearersToday,
                })}
              </p>
            </MarginNote>
          </>
        }
      >
        <PageHead
          way={way}
          title={protector.name}
          lead={
            protector.isArchived
              ? i18n.t("{kind}, no longer given out. Data of {date}.", {
                  kind: protectorKindWord(i18n, protector.kind),
                  date: formatDate(data.effectiveFrom, locale),
                })
              : i18n.t("{kind}. Data in force since {date}.", {
                  kind: protectorKindWord(i18n, protector.kind),
                  date: formatDate(data.effectiveFrom, locale),
                })
          }
          actions={
            mayChange &&
            editing === null && (
              <>
                <Button kind="primary" onClick={() => edit("data")}>
                  {i18n.t("New data")}
                </Button>
                <Button onClick={() => edit("name")}>{i18n.t("Rename or archive")}</Button>
              </>
            )
          }
        />
        {isChanged && <RecomputeProgress />}
        {mayChange && editing === "name" && (
          <Section title={i18n.t("Name and kind")} id="name-form">
            <ProtectorHeadForm protector={protector} onDone={close} />
          </Section>
        )}
        {mayChange && editing === "data" && (
          <Section title={i18n.t("New data from a date on")} id="data-form">
            <ProtectorDataForm
              protector={protector}
              today={today}
              onDone={close}
              onSaved={() => {
                setIsChanged(true);
                close();
              }}
            />
          </Section>
        )}
        <Section title={i18n.t("What cup or plug takes away")} id="passive">
          <AttenuationByBand bands={data.bands} />
        </Section>
        {data.active && (
          <Section title={i18n.t("Active part")} id="active">
            <ActivePart active={data.active} />
          </Section>
        )}
        <AtEar protector={protector} sites={sites} />
        <Section title={i18n.t("Label and test data")} id="label">
          <LabelAndTestData data={data} />
        </Section>
        <Section title={i18n.t("Sizes, what it goes with, replacement")} id="use">
          <UseFacts kind={protector.kind} data={data} />
        </Section>
        <Section title={i18n.t("Worn together with")} id="together">
          <Combinations
            protector={protector}
            mayChange={mayChange}
            timeZone={timeZone}
            today={today}
            onSaved={() => setIsChanged(true)}
          />
        </Section>
        <Section title={i18n.t("Data sheets")} id="sheets">
          <DataSheets modelId={protector.id} mayChange={mayChange} timeZone={timeZone} />
        </Section>
        <Section title={i18n.t("How the data came about")} id="history">
          <DataTable
            caption={i18n.t("History of the data")}
            rows={protector.history}
            rowKey={(revision) => revision.id}
            isSelected={(revision) => revision.id === data.id}
            isTwoLine
            columns={[
              {
                id: "from",
                head: i18n.t("Holds from"),
                isRowHead: true,
                cell: (revision) => (
                  <span className="two-lines">
                    {formatShortDate(revision.effectiveFrom, locale)}
                    {revision.id === data.id && (
                      <span className="beneath">{i18n.t("in force")}</span>
                    )}
                  </span>
                ),
              },
              {
                id: "data",
                head: i18n.t("Label"),
                unit: "dB",
                cell: (revision) => {
                  const found = labelledData(i18n, revision, locale);
                  return found.length > 0 ? (
                    found.map(({ label, value }) => `${label} ${value}`).join(", ")
                  ) : (
                    <span className="not-assessed">{i18n.t("not stated")}</span>
                  );
                },
              },
              {
                id: "bands",
                head: i18n.t("Octave bands"),
                hidesOnPhone: true,
                cell: (revision) => (
                  <span className="two-lines">
                    {revision.bands ? i18n.t("stated") : i18n.t("not stated")}
                    {revision.active && (
                      <span className="beneath">{i18n.t("with an active part")}</span>
                    )}
                  </span>
                ),
              },
              {
                id: "why",
                head: i18n.t("Reason, and who entered it"),
                cell: (revision) => (
                  <span className="two-lines">
                    {revision.reason ?? i18n.t("first data")}
                    <span className="beneath">
                      {[revision.authorName, formatInstant(revision.createdAt, timeZone, locale)]
                        .filter(Boolean)
                        .join(", ")}
                    </span>
                  </span>
                ),
              },
            ]}
          />
        </Section>
      </PageBody>
      <Folio>
        {i18n.t(
          "Mean and standard deviation over the test subjects. How much of the deviation is taken off is the rule set’s to say.",
        )}
      </Folio>
    </>
  );
}
