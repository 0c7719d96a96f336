import { z } from "zod";
import { LOCALES } from "../i18n/compiled/locales";

export const IdParams = z.object({ id: z.uuid() });
export const IsoDate = z.iso.date();
/** HH:MM, local. */
export const TimeOfDay = z.string().regex(/^([01]\d|2[0-3]):[0-5]\d$/);
export const Language = z.enum(LOCALES);
export type Language = z.infer<typeof Language>;

/** A noise level that a person may enter, dB. */
export const LevelDb = z.number().min(20).max(160);
export const Reason = z.string().trim().min(3).max(2000);
/** Letters of any script with their marks, digits, spaces and - / . _ */
const EMPLOYEE_NUMBER = /^[\p{L}\p{M}\p{Nd} \-/._]+$/u;
export const EmployeeNumber = z
  .string()
  .trim()
  .min(1)
  .max(40)
  .check((context) => {
    if (context.value !== "" && !EMPLOYEE_NUMBER.test(context.value))
      context.issues.push({
        code: "custom",
        input: context.value,
        params: { code: "employee-number-signs" },
      });
  });
export const Name = (longest: number) => z.string().trim().min(1).max(longest);

export const PageQuery = z.object({
  /** Where the last page ended, as its `next` said. */
  cursor: z.string().max(500).optional(),
  limit: z.coerce.number().int().min(1).max(200).default(50),
});

export const pageOf = <Row extends z.ZodType>(row: Row) =>
  z.object({ rows: z.array(row), next: z.string().nullable() });

export const Can = <Action extends string>(...actions: Action[]) =>
  z.object(
    Object.fromEntries(actions.map((action) => [action, z.boolean()])) as Record<
      Action,
      z.ZodBoolean
    >,
  );

/** A list narrowed to one site. */
export const AtSiteQuery = z.object({ siteId: z.uuid().optional() });
