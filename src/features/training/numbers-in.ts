/** Employee numbers as they are typed or pasted: by lines, commas, semicolons or tabs; each counts once. */
export const numbersIn = (text: string): string[] => [
  ...new Set(
    text
      .split(/[\n,;\t]+/)
      .map((number) => number.trim())
      .filter((number) => number !== ""),
  ),
];
