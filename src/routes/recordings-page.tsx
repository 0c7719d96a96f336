import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useNavigate, useSearchParams } from "react-router-dom";
import { Failed } from "../components/failed";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { RecordingForm } from "../features/recordings/recording-form";
import { RecordingsTable } from "../features/recordings/recordings-table";
import { hasRole, useUser } from "../features/session/session";
import { references } from "../lib/references";
import { paths } from "../paths";
import "../styles/histories.css";
import "../styles/recordings.css";
import { MeasuringWays } from "./measuring-frame";

/** A recording is sent in here; beneath stand those whose sound is kept, and all that came in. */
export function Component() {
  const { i18n } = useLingui();
  const isOfficer = hasRole(useUser(), "officer");
  return (
    <>
      <PageBody
        margin={
          <MarginNote title={i18n.t("Speech")}>
            <p>{i18n.t("A recording holds what people say while they work.")}</p>
            <p>
              {i18n.t(
                "Its levels and spectra are kept. The sound itself is discarded as soon as they are worked out, unless you give a reason to keep it and a day on which it goes. Only officers can listen to it.",
              )}
            </p>
          </MarginNote>
        }
      >
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("Recordings")}
          lead={i18n.t(
            "From the sound of a task to its level and its spectrum; the sound itself is then discarded.",
          )}
        />
        {isOfficer && <NewRecordingSection />}
        <Section id="kept" title={i18n.t("Sound that is kept")}>
          <RecordingsTable isKept />
        </Section>
        <Section id="all" title={i18n.t("All recordings")}>
          <RecordingsTable />
        </Section>
      </PageBody>
      <Folio>
        {i18n.t(
          "Levels by IEC 61672-1, bands by IEC 61260-1, class 1. They are as good as the microphone and its calibration.",
        )}
      </Folio>
    </>
  );
}

function NewRecordingSection() {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const user = useUser();
  const [search] = useSearchParams();
  const [siteId, setSiteId] = useState(search.get("site") ?? user.sites[0]?.id ?? "");
  const tasks = useQuery(references.tasks(siteId));
  return (
    <Section id="send" title={i18n.t("Send a recording in")}>
      {user.sites.length > 1 && (
        <FilterRow label={i18n.t("Site")}>
          <FilterSelect
            label={i18n.t("Site")}
            value={siteId}
            onChange={setSiteId}
            choices={user.sites.map(({ id, name }) => ({ value: id, label: name }))}
          />
        </FilterRow>
      )}
      {tasks.error && <Failed error={tasks.error} onRetry={() => void tasks.refetch()} />}
      <RecordingForm
        key={siteId}
        tasks={(tasks.data?.rows ?? [])
          .filter(({ isArchived }) => !isArchived)
          .map(({ id, name }) => ({ value: id, label: name }))}
        taskId={search.get("task")}
        onSent={({ id }) => navigate(paths.recording(id))}
      />
    </Section>
  );
}
