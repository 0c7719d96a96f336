import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useParams } from "react-router-dom";
import { A_WEIGHTING_DB, weightedSumDb } from "../../shared/acoustics/protection/octave-band";
import { HEARING_THRESHOLD_DB } from "../../shared/acoustics/protection/warning-signal";
import { OCTAVE_BANDS_HZ } from "../../shared/acoustics/types";
import { formatLevel } from "../../shared/format/level";
import { withoutStop } from "../../shared/format/words";
import { BandPicture } from "../components/band-picture";
import { Button } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { FilterCheck, FilterRow } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { AudibilityTable, mayBeMissed, tallyOf } from "../features/signals/audibility-table";
import { signalQueries } from "../features/signals/queries";
import { SignalForm } from "../features/signals/signal-form";
import { useEditParam } from "../lib/edit-param";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";

/** One signal: what it says, how loud it arrives, and whether it is heard in each task under what is worn there. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id = "" } = useParams();
  const choice = useSiteChoice();
  const { editing, edit, close } = useEditParam();
  const [isOnlyMissed, setIsOnlyMissed] = useState(false);
  const { data: signal, error, refetch } = useQuery(signalQueries.one(id));
  const way = <TextLink to={paths.signals}>{i18n.t("Warning signals")}</TextLink>;
  if (!signal)
    return (
      <PageBody>
        <PageHead way={way} title={error ? i18n.t("Signal") : " "} />
        {error && <Failed error={error} onRetry={() => void refetch()} />}
      </PageBody>
    );
  const isNarrowed = isOnlyMissed && signal.audibility.some(mayBeMissed);
  const tally = tallyOf(signal.audibility);
  const isChanging = signal.can.change && editing !== null;
  return (
    <>
      <PageBody
        margin={
          <MarginNote title={i18n.t("In all")} isRuled>
            <Leaders
              items={[
                { key: "heard", label: i18n.t("Stays audible"), value: tally.heard },
                { key: "lost", label: i18n.t("May not be heard"), value: tally.lost },
                { key: "open", label: i18n.t("Not assessed"), value: tally.open },
              ]}
            />
          </MarginNote>
        }
      >
        <PageHead
          way={way}
          title={signal.name}
          lead={[
            signal.meaning === "" ? null : `${withoutStop(signal.meaning)}.`,
            `${signal.siteName}, ${signal.areaName ?? i18n.t("the whole site")}.`,
            signal.isArchived ? i18n.t("No longer in use.") : null,
          ]
            .filter(Boolean)
            .join(" ")}
          actions={
            signal.can.change &&
            !isChanging && (
              <Button kind="primary" onClick={() => edit("signal")}>
                {i18n.t("Change")}
              </Button>
            )
          }
        />
        {isChanging && (
          <Section title={i18n.t("Change {name}", { name: signal.name })} id="signal-form">
            <SignalForm
              signal={signal}
              siteId={signal.siteId}
              sites={choice.sites.map((site) => ({ value: site.id, label: site.name }))}
              onSaved={close}
              onLeave={close}
            />
          </Section>
        )}
        <Section title={i18n.t("Whether it is heard")} id="audibility">
          {tally.lost > 0 && (
            <FilterRow label={i18n.t("What is shown")}>
              <FilterCheck
                label={i18n.t("Only where it may not be heard")}
                isChecked={isNarrowed}
                onChange={setIsOnlyMissed}
              />
            </FilterRow>
          )}
          <AudibilityTable
            rows={isNarrowed ? signal.audibility.filter(mayBeMissed) : signal.audibility}
            empty={
              <Empty title={i18n.t("No task is done where it sounds.")}>
                {i18n.t("Tasks lie in areas; a signal of the whole site is heard in all of them.")}
              </Empty>
            }
          />
          {signal.audibility.length > 0 && (
            <p className="picture-legend">
              {i18n.t(
                "Above: over what masks it in its best band; 10 dB are asked for, and that it passes the threshold of hearing.",
              )}
            </p>
          )}
        </Section>
        <Section title={i18n.t("As it arrives")} id="spectrum">
          <div className="picture-and-table">
            <div>
              <BandPicture
                title={i18n.t(
                  "Signal by octave band, dB, and the threshold of hearing; the table beside it says the same",
                )}
                lowDb={0}
                highDb={110}
                series={[
                  {
                    key: "threshold",
                    label: i18n.t("Threshold of hearing"),
                    valuesDb: HEARING_THRESHOLD_DB,
                    kind: "active",
                  },
                  { key: "signal", label: i18n.t("Signal"), valuesDb: signal.octaveBandsDb },
                ]}
              />
              <p className="picture-legend">
                {i18n.t(
                  "Tick: the signal, unweighted, dB. Ring: the threshold of hearing. Hz beneath.",
                )}
              </p>
            </div>
            <DataTable
              caption={i18n.t("Signal by octave band")}
              rows={OCTAVE_BANDS_HZ.map((hz, band) => ({
                hz,
                db: signal.octaveBandsDb[band] ?? null,
              }))}
              rowKey={({ hz }) => String(hz)}
              columns={[
                {
                  id: "band",
                  head: i18n.t("Band"),
                  unit: "Hz",
                  kind: "figure",
                  isRowHead: true,
                  cell: ({ hz }) => hz,
                },
                {
                  id: "level",
                  head: i18n.t("Level"),
                  unit: "dB",
                  kind: "figure",
                  cell: ({ db }) => formatLevel(db, locale),
                },
              ]}
              foot={
                <tr>
                  <th scope="row" className="is-figure">
                    {i18n.t("A-weighted")}
                  </th>
                  <td className="is-figure">
                    {formatLevel(weightedSumDb(signal.octaveBandsDb, A_WEIGHTING_DB), locale)}
                  </td>
                </tr>
              }
            />
          </div>
        </Section>
      </PageBody>
      <Folio>
        {i18n.t(
          "ISO 7731: audible where a signal passes the masked threshold by 10 dB in at least one octave band. Both pass the protector by its mean: half of its users hear less.",
        )}
      </Folio>
    </>
  );
}
