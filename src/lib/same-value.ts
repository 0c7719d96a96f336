const isRecord = (value: unknown): value is Readonly<Record<string, unknown>> =>
  typeof value === "object" && value !== null && !Array.isArray(value);

/** Whether two JSON values say the same, in whatever order their keys stand; a key without a value is as good as none. */
export function isSameValue(one: unknown, other: unknown): boolean {
  if (Array.isArray(one) && Array.isArray(other))
    return (
      one.length === other.length && one.every((item, place) => isSameValue(item, other[place]))
    );
  if (isRecord(one) && isRecord(other))
    return [...new Set([...Object.keys(one), ...Object.keys(other)])].every((key) =>
      isSameValue(one[key], other[key]),
    );
  return one === other;
}
