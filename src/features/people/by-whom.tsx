/** In a table: who did it, and beneath it when. */
export function ByWhom({ name, at }: { name: string; at: string }) {
  return (
    <>
      <bdi>{name}</bdi>
      <span className="visitor-mail">{at}</span>
    </>
  );
}
