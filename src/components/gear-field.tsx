import { useLingui } from "@lingui/react";
import { type FieldValues, useController } from "react-hook-form";
import { Gear } from "../../shared/schemas/fit";
import { gearWord } from "../../shared/words/register-words";
import { Field, type FieldProps } from "./form";

/** Helmet, glasses, respirator: those that are worn, or asked for, beside a protector. */
export function GearField<Values extends FieldValues, Output>(props: FieldProps<Values, Output>) {
  const { i18n } = useLingui();
  const { field, fieldState } = useController({ control: props.form.control, name: props.name });
  const chosen = (field.value ?? []) as readonly Gear[];
  return (
    <Field {...props} isOptional={false} error={fieldState.error?.message} isGroup>
      {() =>
        Gear.options.map((gear, index) => (
          <label key={gear} className="choice">
            <input
              type="checkbox"
              ref={index === 0 ? field.ref : undefined}
              name={field.name}
              checked={chosen.includes(gear)}
              onChange={(event) =>
                field.onChange(
                  Gear.options.filter((one) =>
                    one === gear ? event.target.checked : chosen.includes(one),
                  ),
                )
              }
              onBlur={field.onBlur}
            />
            <span>{gearWord(i18n, gear)}</span>
          </label>
        ))
      }
    </Field>
  );
}
