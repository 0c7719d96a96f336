/** Text that a spreadsheet would take for a formula is marked as text by an apostrophe, as `csv_text` does in the database. */
export const guardFormula = (text: string): string =>
  /^[=+\-@\t\r]/.test(text) ? `'${text}` : text;
