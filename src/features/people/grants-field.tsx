import { useLingui } from "@lingui/react";
import { useId, useRef } from "react";
import {
  type FieldPath,
  type FieldValues,
  get,
  type UseFormReturn,
  useController,
  useFormState,
} from "react-hook-form";
import type { RoleName } from "../../../shared/schemas/session";
import type { UserView } from "../../../shared/schemas/user";
import { Button } from "../../components/button";
import { Field } from "../../components/form";
import { TextButton } from "../../components/link";
import { roleWord } from "../../lib/role-word";
import type { AdministeredSites } from "./queries";
import { grantWords, ROLES } from "./role-words";

export interface Grant {
  role: RoleName;
  siteId?: string | null;
}

/** The first role that is offered: at the one site there is, else at all, or at the first where all are not one's own. */
export const newGrant = ({ sites, isAll }: AdministeredSites): Grant & { role: "worker" } => ({
  role: "worker",
  siteId: isAll && sites.length !== 1 ? null : (sites[0]?.id ?? null),
});

/** Roles, each at one site or at all of them. What reaches beyond the sites that one administers stands as it is. */
export function GrantsField<Values extends FieldValues, Output>({
  form,
  name,
  administered,
  others = [],
}: {
  form: UseFormReturn<Values, unknown, Output>;
  name: FieldPath<Values>;
  administered: AdministeredSites;
  /** Grants that are not this administrator's to change. */
  others?: readonly Pick<UserView["grants"][number], "role" | "siteId" | "siteName">[];
}) {
  const { sites, isAll } = administered;
  const { i18n } = useLingui();
  const id = useId();
  const addRef = useRef<HTMLDivElement>(null);
  const { field } = useController({ control: form.control, name });
  const { errors } = useFormState({ control: form.control });
  const grants = (field.value ?? []) as Grant[];
  const found: { message?: unknown; root?: { message?: unknown } } | undefined = get(errors, name);
  const ofAll = found?.message ?? found?.root?.message;
  const put = (next: Grant[]) => field.onChange(next);
  const change = (index: number, part: Partial<Grant>) =>
    put(grants.map((grant, at) => (at === index ? { ...grant, ...part } : grant)));

  return (
    <Field
      label={i18n.t("Roles")}
      error={typeof ofAll === "string" ? ofAll : undefined}
      note={
        isAll
          ? i18n.t("A role at one site, or at all of them. Several roles add up.")
          : i18n.t("A role at one of your sites. Several roles add up; those elsewhere stay.")
      }
      isGroup
    >
      {() => (
        <div ref={addRef}>
          <ul className="grants">
            {grants.map((grant, index) => {
              const own: unknown = get(errors, `${name}.${index}`);
              const message = messageIn(own);
              const fixed = others.find(
                ({ role, siteId }) => role === grant.role && siteId === (grant.siteId ?? null),
              );
              if (fixed)
                return (
                  // biome-ignore lint/suspicious/noArrayIndexKey: a row is its place until it is saved
                  <li key={index}>{grantWords(i18n, fixed)}</li>
                );
              return (
                // biome-ignore lint/suspicious/noArrayIndexKey: a row is its place until it is saved
                <li key={index}>
                  <select
                    className="input"
                    aria-label={i18n.t("Role {number}", { number: index + 1 })}
                    aria-invalid={message ? true : undefined}
                    aria-describedby={message ? `${id}-${index}` : undefined}
                    value={grant.role}
                    onChange={(event) => change(index, { role: event.target.value as RoleName })}
                  >
                    {ROLES.map((role) => (
                      <option key={role} value={role}>
                        {roleWord(i18n, role)}
                      </option>
                    ))}
                  </select>
                  <select
                    className="input"
                    aria-label={i18n.t("Site of role {number}", { number: index + 1 })}
                    value={grant.siteId ?? ""}
                    onChange={(event) => change(index, { siteId: event.target.value || null })}
                  >
                    {isAll && <option value="">{i18n.t("All sites")}</option>}
                    {sites.map((site) => (
                      <option key={site.id} value={site.id}>
                        {site.name}
                      </option>
                    ))}
                  </select>
                  <TextButton
                    aria-label={i18n.t("Take away role {number}", { number: index + 1 })}
                    onClick={() => {
                      put(grants.filter((_, at) => at !== index));
                      addRef.current?.querySelector<HTMLElement>(".button")?.focus();
                    }}
                  >
                    {i18n.t("Take away")}
                  </TextButton>
                  {message && (
                    <p className="field-error" id={`${id}-${index}`}>
                      {message}
                    </p>
                  )}
                </li>
              );
            })}
          </ul>
          <Button onClick={() => put([...grants, newGrant(administered)])}>
            {i18n.t("Add a role")}
          </Button>
        </div>
      )}
    </Field>
  );
}

function messageIn(error: unknown): string | null {
  if (typeof error !== "object" || error === null) return null;
  const { message } = error as { message?: unknown };
  if (typeof message === "string") return message;
  return Object.values(error).map(messageIn).find(Boolean) ?? null;
}
