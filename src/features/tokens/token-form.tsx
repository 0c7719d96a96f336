import { useLingui } from "@lingui/react";
import { useState } from "react";
import { useController } from "react-hook-form";
import { TOKEN_DAYS, TOKEN_SCOPES, TokenInput } from "../../../shared/schemas/api-token";
import {
  Field,
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useMakeToken } from "./queries";
import { scopeMeaning } from "./token-words";

/** A token for another system: what it opens, for how long; it is shown this once. */
export function TokenForm() {
  const { i18n } = useLingui();
  const [made, setMade] = useState<string | null>(null);
  const form = useSchemaForm(TokenInput, {
    defaultValues: { name: "", scopes: [], days: "90" },
    keepAs: "/tokens new",
  });
  const { field, fieldState } = useController({ control: form.control, name: "scopes" });
  const chosen = field.value ?? [];
  const make = useMakeToken();
  return (
    <>
      <Form
        aria-label={i18n.t("New token")}
        onSubmit={form.handleSubmit((body) => {
          if (!make.begin()) return;
          make.mutate(body, {
            onSuccess: ({ token }) => {
              form.reset();
              setMade(token);
            },
            onError: showIssuesOn(form, i18n),
          });
        })}
      >
        <TextField
          form={form}
          name="name"
          label={i18n.t("Name")}
          note={i18n.t("Of the system that will have it.")}
          inputProps={{ autoComplete: "off" }}
        />
        <Field label={i18n.t("What it opens")} error={fieldState.error?.message} isGroup>
          {() =>
            TOKEN_SCOPES.map((scope, index) => (
              <label key={scope} className="choice">
                <input
                  type="checkbox"
                  ref={index === 0 ? field.ref : undefined}
                  checked={chosen.includes(scope)}
                  onBlur={field.onBlur}
                  onChange={({ target }) =>
                    field.onChange(
                      TOKEN_SCOPES.filter((one) =>
                        one === scope ? target.checked : chosen.includes(one),
                      ),
                    )
                  }
                />
                <span>{scopeMeaning(i18n, scope)}</span>
              </label>
            ))
          }
        </Field>
        <SelectField
          form={form}
          name="days"
          label={i18n.t("Works for")}
          choices={TOKEN_DAYS.map((days) => ({
            value: String(days),
            label: i18n.t("{days} days", { days }),
          }))}
        />
        <FormProblem error={make.error} />
        <FormActions>
          <SubmitButton isBusy={make.isPending}>{i18n.t("Make a token")}</SubmitButton>
        </FormActions>
      </Form>
      <div role="status" aria-live="polite">
        {made !== null && (
          <label className="token-made">
            {i18n.t("Your token, shown this once")}
            <input
              className="input mono"
              readOnly
              value={made}
              onFocus={(event) => event.target.select()}
            />
          </label>
        )}
      </div>
    </>
  );
}
