import { useLingui } from "@lingui/react";
import {
  type FieldPath,
  type FieldValues,
  get,
  type UseFormReturn,
  useController,
  useFormState,
} from "react-hook-form";
import { Field } from "../../components/form";
import { ruleSetKeys } from "./rule-set-keys";

/** Any number of rule sets that are computed beside the governing one. */
export function RuleSetsField<Values extends FieldValues, Output>({
  form,
  name,
  governing,
}: {
  form: UseFormReturn<Values, unknown, Output>;
  name: FieldPath<Values>;
  /** Not to be compared with itself. */
  governing: string;
}) {
  const { i18n } = useLingui();
  const { field } = useController({ control: form.control, name });
  const { errors } = useFormState({ control: form.control });
  const found: unknown = get(errors, name);
  const chosen = (field.value ?? []) as string[];
  return (
    <Field
      label={i18n.t("For comparison")}
      isOptional
      error={messageOf(found)}
      note={i18n.t("Shown beside the governing rules; nothing follows from them.")}
      isGroup
    >
      {() =>
        ruleSetKeys
          .filter(({ key }) => key !== governing)
          .map(({ key, title, citation }) => (
            <label key={key} className="choice">
              <input
                type="checkbox"
                checked={chosen.includes(key)}
                onChange={(event) =>
                  field.onChange(
                    event.target.checked ? [...chosen, key] : chosen.filter((one) => one !== key),
                  )
                }
              />
              <span>
                {i18n._(title)}
                <span className="beneath block">{citation}</span>
              </span>
            </label>
          ))
      }
    </Field>
  );
}

function messageOf(error: unknown): string | undefined {
  if (typeof error !== "object" || error === null) return undefined;
  const { message } = error as { message?: unknown };
  if (typeof message === "string") return message;
  return Object.values(error).map(messageOf).find(Boolean);
}
