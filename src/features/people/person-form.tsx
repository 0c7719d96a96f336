import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import { isLocale, LOCALE_NAMES, LOCALES, type Locale, localeOf } from "../../../shared/i18n/index";
import { UserChange, UserInput, UserView } from "../../../shared/schemas/user";
import { ComboboxField } from "../../components/combobox-field";
import { SelectField, TextField } from "../../components/form";
import { RecordForm } from "../../components/record-form";
import { EmptyAsNullField } from "./empty-as-null-field";
import { GrantsField, newGrant } from "./grants-field";
import { type AdministeredSites, peopleQueries, searchWorkers } from "./queries";
import { grantWords } from "./role-words";

type Change = z.output<typeof UserChange>;
const languages = LOCALES.map((value) => ({ value, label: LOCALE_NAMES[value] }));
const languageName = (language: string) => LOCALE_NAMES[language as Locale] ?? language;

const toChange = ({ name, language, workerId, grants }: UserView): Change => ({
  name,
  language: isLocale(language) ? language : "en",
  workerId,
  grants: grants
    .filter(({ endsAt, groupName }) => endsAt === null && groupName === null)
    .flatMap(({ role, siteId }) => (role === "employer" ? [] : [{ role, siteId }])),
});

interface FormProps {
  administered: AdministeredSites;
  onSaved: (person: UserView) => void;
  onLeave: () => void;
}

function useSaved(onSaved: (person: UserView) => void) {
  const client = useQueryClient();
  return (person: UserView) => {
    void client.invalidateQueries({ queryKey: peopleQueries.all });
    onSaved(person);
  };
}

/** Somebody new: known by an e-mail that the provider calls verified, or by the provider's own name for them. */
export function NewPersonForm({ administered, onSaved, onLeave }: FormProps) {
  const { i18n } = useLingui();
  const saved = useSaved(onSaved);
  return (
    <RecordForm
      name={i18n.t("New person")}
      schema={UserInput}
      viewSchema={UserView}
      path="/users"
      record={null}
      defaultValues={{
        name: "",
        email: null,
        expectedSubject: null,
        workerId: null,
        language: localeOf(i18n),
        grants: [newGrant(administered)],
      }}
      toBody={({ email, expectedSubject, ...person }) => ({
        ...toChange({ email, expectedSubject, ...person }),
        email,
        expectedSubject,
      })}
      fields={[]}
      conflictTitle={i18n.t("Someone saved this person before you")}
      onSaved={saved}
      onLeave={onLeave}
    >
      {(form) => (
        <>
          <TextField form={form} name="name" label={i18n.t("Name")} />
          <EmptyAsNullField
            form={form}
            name="email"
            type="email"
            label={i18n.t("E-mail")}
            isOptional
            note={i18n.t("As the sign-in service knows it, and calls it verified.")}
          />
          <EmptyAsNullField
            form={form}
            name="expectedSubject"
            type="text"
            label={i18n.t("Name at the sign-in service")}
            isOptional
            note={i18n.t("For somebody without an e-mail: the service’s own name for the person.")}
          />
          <SelectField form={form} name="language" label={i18n.t("Language")} choices={languages} />
          <ComboboxField
            form={form}
            name="workerId"
            label={i18n.t("Worker")}
            isOptional
            note={i18n.t("Whose own page this person sees. By name or number.")}
            search={searchWorkers}
          />
          <GrantsField form={form} name="grants" administered={administered} />
        </>
      )}
    </RecordForm>
  );
}

export function PersonForm({
  person,
  administered,
  onSaved,
  onLeave,
}: FormProps & { person: UserView }) {
  const { i18n } = useLingui();
  const saved = useSaved(onSaved);
  const siteName = (id: string | null) =>
    id === null
      ? null
      : (administered.sites.find((site) => site.id === id)?.name ??
        person.grants.find(({ siteId }) => siteId === id)?.siteName ??
        id);
  return (
    <RecordForm
      name={i18n.t("Change this person")}
      schema={UserChange}
      viewSchema={UserView}
      path="/users"
      record={person}
      defaultValues={toChange(person)}
      toBody={toChange}
      fields={[
        { key: "name", label: i18n.t("Name"), show: ({ name }) => name },
        {
          key: "language",
          label: i18n.t("Language"),
          show: ({ language }) => languageName(language),
        },
        {
          key: "workerId",
          label: i18n.t("Worker"),
          show: ({ workerId }) =>
            workerId === null
              ? "–"
              : workerId === person.workerId
                ? person.workerName
                : i18n.t("another worker"),
        },
        {
          key: "grants",
          label: i18n.t("Roles"),
          show: ({ grants }) =>
            grants
              .map(({ role, siteId }) => grantWords(i18n, { role, siteName: siteName(siteId) }))
              .join("; "),
        },
      ]}
      conflictTitle={i18n.t("Someone saved this person before you")}
      onSaved={saved}
      onLeave={onLeave}
    >
      {(form) => (
        <>
          <TextField form={form} name="name" label={i18n.t("Name")} />
          <SelectField form={form} name="language" label={i18n.t("Language")} choices={languages} />
          <ComboboxField
            form={form}
            name="workerId"
            label={i18n.t("Worker")}
            isOptional
            note={i18n.t("Whose own page this person sees. By name or number.")}
            search={searchWorkers}
            chosen={
              person.workerId === null
                ? null
                : { value: person.workerId, label: person.workerName ?? "" }
            }
          />
          <GrantsField
            form={form}
            name="grants"
            administered={administered}
            others={person.grants.filter(({ isWithinReach }) => !isWithinReach)}
          />
        </>
      )}
    </RecordForm>
  );
}
