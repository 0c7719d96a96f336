import { type FieldValues, useController } from "react-hook-form";
import { Field, type FieldProps } from "../../components/form";

/** A text that may be missing: an emptied field says that there is none, not that it is the empty text. */
export function EmptyAsNullField<Values extends FieldValues, Output>({
  type,
  ...props
}: FieldProps<Values, Output> & { type: "text" | "email" }) {
  const { field, fieldState } = useController({ control: props.form.control, name: props.name });
  return (
    <Field {...props} error={fieldState.error?.message}>
      {(wires) => (
        <input
          className="input"
          type={type}
          autoComplete="off"
          {...field}
          {...wires}
          value={field.value ?? ""}
          onChange={(event) =>
            field.onChange(event.target.value === "" ? null : event.target.value)
          }
        />
      )}
    </Field>
  );
}
