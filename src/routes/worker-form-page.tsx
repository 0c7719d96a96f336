import { useLingui } from "@lingui/react";
import { useQuery, useQueryClient } from "@tanstack/react-query";
import { useNavigate, useParams } from "react-router-dom";
import { formatShortDate } from "../../shared/format/date";
import { formatLimit } from "../../shared/format/level";
import { LOCALE_NAMES, LOCALES } from "../../shared/i18n/index";
import { WorkerInput, WorkerView } from "../../shared/schemas/worker";
import { localDate } from "../../shared/time/zone";
import { gearWords } from "../../shared/words/register-words";
import type { ConflictField } from "../components/conflict-dialog";
import { Failed } from "../components/failed";
import {
  CheckField,
  DateField,
  NumberField,
  SelectField,
  TextAreaField,
  TextField,
} from "../components/form";
import { GearField } from "../components/gear-field";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { RecordForm } from "../components/record-form";
import { jobQueries } from "../features/jobs/queries";
import { useUser } from "../features/session/session";
import { workerQueries } from "../features/workers/queries";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/findings.css";

const jobsOf = (siteId: string) => ({ ...jobQueries.list(siteId), enabled: siteId !== "" });

const toBody = ({
  siteId,
  jobId,
  employeeNumber,
  name,
  employer,
  employerName,
  language,
  hiredOn,
  leftOn,
  mustWear,
  personalTargetDb,
  wornGear,
  requirementReason,
}: WorkerView): WorkerInput => ({
  siteId,
  jobId,
  employeeNumber,
  name,
  employer,
  employerName,
  language,
  hiredOn,
  leftOn,
  mustWear,
  personalTargetDb,
  wornGear,
  requirementReason,
});

export function Component() {
  const { i18n } = useLingui();
  const { id } = useParams();
  const worker = useQuery({ ...workerQueries.one(id ?? ""), enabled: id !== undefined });
  if (id === undefined) return <WorkerForm worker={null} />;
  if (worker.data) return <WorkerForm key={worker.data.id} worker={worker.data} />;
  return (
    <PageBody>
      <PageHead
        title={i18n.t("Worker")}
        lead={worker.error ? undefined : <span className="loading-line" />}
      />
      {worker.error && <Failed error={worker.error} onRetry={() => void worker.refetch()} />}
    </PageBody>
  );
}

function WorkerForm({ worker }: { worker: WorkerView | null }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const navigate = useNavigate();
  const client = useQueryClient();
  const [firstSite] = user.sites;
  const sites = user.sites.map(({ id, name }) => ({ value: id, label: name }));
  const yesNo = (value: boolean) => (value ? i18n.t("yes") : i18n.t("no"));
  const text = (value: string | null) => value ?? "–";
  const employers = [
    { value: "own", label: i18n.t("own") },
    { value: "agency", label: i18n.t("agency") },
    { value: "contractor", label: i18n.t("contractor") },
  ];
  const jobs = useQuery(jobsOf(worker?.siteId ?? firstSite?.id ?? ""));
  const fields: ConflictField<WorkerInput>[] = [
    { key: "name", label: i18n.t("Name"), show: ({ name }) => name },
    {
      key: "employeeNumber",
      label: i18n.t("Employee number"),
      show: ({ employeeNumber }) => employeeNumber,
    },
    {
      key: "siteId",
      label: i18n.t("Site"),
      show: ({ siteId }) => sites.find(({ value }) => value === siteId)?.label ?? "–",
    },
    {
      key: "jobId",
      label: i18n.t("Job"),
      show: ({ jobId }) => jobs.data?.rows.find(({ id }) => id === jobId)?.name ?? "–",
    },
    {
      key: "employer",
      label: i18n.t("Employer"),
      show: ({ employer }) => employers.find(({ value }) => value === employer)?.label,
    },
    {
      key: "employerName",
      label: i18n.t("Employer’s name"),
      show: ({ employerName }) => text(employerName),
    },
    { key: "language", label: i18n.t("Language"), show: ({ language }) => LOCALE_NAMES[language] },
    {
      key: "hiredOn",
      label: i18n.t("Hired"),
      show: ({ hiredOn }) => formatShortDate(hiredOn, locale),
    },
    {
      key: "leftOn",
      label: i18n.t("Left"),
      show: ({ leftOn }) => (leftOn ? formatShortDate(leftOn, locale) : "–"),
    },
    { key: "mustWear", label: i18n.t("Must wear"), show: ({ mustWear }) => yesNo(mustWear) },
    {
      key: "personalTargetDb",
      label: i18n.t("At most at the ear"),
      show: ({ personalTargetDb }) =>
        personalTargetDb === null ? "–" : formatLimit(personalTargetDb, locale),
    },
    {
      key: "wornGear",
      label: i18n.t("Worn beside a protector"),
      show: ({ wornGear }) => text(gearWords(i18n, wornGear)),
    },
    {
      key: "requirementReason",
      label: i18n.t("Reason"),
      show: ({ requirementReason }) => text(requirementReason),
    },
  ];
  const leave = () => navigate(worker ? paths.worker(worker.id) : paths.workers);
  return (
    <>
      <PageBody>
        <PageHead
          way={
            <>
              <TextLink to={paths.workers}>{i18n.t("Workers")}</TextLink>
              {worker && (
                <>
                  {" "}
                  / <TextLink to={paths.worker(worker.id)}>{worker.name}</TextLink>
                </>
              )}
            </>
          }
          title={worker ? i18n.t("Change {name}", { name: worker.name }) : i18n.t("New worker")}
          lead={i18n.t("Crew and protectors are given on the worker’s page and the crew’s.")}
        />
        <RecordForm
          name={worker ? i18n.t("Change a worker") : i18n.t("New worker")}
          schema={WorkerInput}
          viewSchema={WorkerView}
          path="/workers"
          record={worker}
          toBody={toBody}
          fields={fields}
          conflictTitle={i18n.t("Someone saved this worker before you")}
          defaultValues={
            worker
              ? toBody(worker)
              : {
                  siteId: firstSite?.id ?? "",
                  jobId: null,
                  employeeNumber: "",
                  name: "",
                  employer: "own",
                  employerName: null,
                  language: "en",
                  hiredOn: localDate(new Date(), firstSite?.timeZone ?? "UTC"),
                  leftOn: null,
                  mustWear: false,
                  personalTargetDb: null,
                  wornGear: [],
                  requirementReason: null,
                }
          }
          onSaved={(saved) => {
            client.setQueryData(workerQueries.one(saved.id).queryKey, saved);
            void client.invalidateQueries({ queryKey: workerQueries.all });
            void navigate(paths.worker(saved.id));
          }}
          onLeave={() => void leave()}
        >
          {(form) => {
            const siteId = form.watch("siteId");
            const needsReason = form.watch("mustWear") || form.watch("personalTargetDb") !== null;
            return (
              <>
                <TextField form={form} name="name" label={i18n.t("Name")} />
                <TextField form={form} name="employeeNumber" label={i18n.t("Employee number")} />
                {sites.length > 1 && (
                  <SelectField form={form} name="siteId" label={i18n.t("Site")} choices={sites} />
                )}
                <JobField siteId={siteId}>
                  {(choices) => (
                    <SelectField
                      form={form}
                      name="jobId"
                      label={i18n.t("Job")}
                      choices={choices}
                      emptyLabel={i18n.t("none yet")}
                      isOptional
                      note={i18n.t("Its nominal day fills the day grid in.")}
                    />
                  )}
                </JobField>
                <SelectField
                  form={form}
                  name="employer"
                  label={i18n.t("Employer")}
                  choices={employers}
                />
                {form.watch("employer") !== "own" && (
                  <TextField
                    form={form}
                    name="employerName"
                    label={i18n.t("Employer’s name")}
                    isOptional
                  />
                )}
                <SelectField
                  form={form}
                  name="language"
                  label={i18n.t("Language")}
                  choices={LOCALES.map((one) => ({ value: one, label: LOCALE_NAMES[one] }))}
                  note={i18n.t(
                    "Mails and the worker’s own page speak it, until the worker chooses another.",
                  )}
                />
                <DateField form={form} name="hiredOn" label={i18n.t("Hired")} />
                <DateField
                  form={form}
                  name="leftOn"
                  label={i18n.t("Left")}
                  isOptional
                  note={
                    worker?.leftOn
                      ? i18n.t(
                          "The last day of work here. What ended with it, crew and protectors, does not come back with a later day.",
                        )
                      : i18n.t(
                          "The last day of work here: crew, loans, absences and protectors assigned end with it.",
                        )
                  }
                />
                <GearField
                  form={form}
                  name="wornGear"
                  label={i18n.t("Worn beside a protector")}
                  note={i18n.t(
                    "In every task; what a task asks for stands with the task. Protectors that don’t go with it are not offered.",
                  )}
                />
                <CheckField
                  form={form}
                  name="mustWear"
                  label={i18n.t("Personal requirement")}
                  text={i18n.t("Must wear a protector whatever the level")}
                />
                <NumberField
                  form={form}
                  name="personalTargetDb"
                  label={i18n.t("At most at the ear")}
                  unit="dB(A)"
                  isOptional
                  note={i18n.t("A stricter target at the ear than the rule’s. 60 to 100.")}
                />
                {needsReason && (
                  <TextAreaField
                    form={form}
                    name="requirementReason"
                    label={i18n.t("Reason")}
                    rows={3}
                    isOptional
                    note={i18n.t("Only officers see it: no supervisor, no auditor, no export.")}
                  />
                )}
              </>
            );
          }}
        </RecordForm>
      </PageBody>
      <Folio>
        {i18n.t("A personal requirement holds from today on; days from today are judged by it.")}
      </Folio>
    </>
  );
}

function JobField({
  siteId,
  children,
}: {
  siteId: string;
  children: (choices: { value: string; label: string }[]) => React.ReactNode;
}) {
  const { data } = useQuery(jobsOf(siteId));
  return children(
    (data?.rows ?? [])
      .filter(({ isArchived }) => !isArchived)
      .map(({ id, name }) => ({ value: id, label: name })),
  );
}
