/**
 * SQL that is true where every word of a text occurs in an expression that is in lower case already. The words go in
 * as values; what LIKE would read as a wildcard is taken as it stands.
 */
export function containsWords(expression: string, text: string) {
  const words = text.split(/\s+/).filter(Boolean).slice(0, 6);
  const patterns = words.map((word) => `%${word.replace(/[\\%_]/g, "\\$&")}%`);
  return {
    condition:
      patterns.map((_, index) => `${expression} LIKE lower(:word${index})`).join(" AND ") || "TRUE",
    values: Object.fromEntries(patterns.map((pattern, index) => [`word${index}`, pattern])),
  };
}
