/** A sentence whose part between two asterisks stands out; so a translator can put it where it belongs. */
export function Emphasis({ text }: { text: string }) {
  const [before = "", strong, after] = text.split("*");
  return (
    <>
      {before}
      {strong !== undefined && <b>{strong}</b>}
      {after}
    </>
  );
}
