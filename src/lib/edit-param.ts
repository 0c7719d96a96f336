import { useSearchParams } from "react-router-dom";

/** What a register page has open for change, kept in its address: an id, or "new". */
export function useEditParam(): {
  editing: string | null;
  edit: (id: string) => void;
  close: () => void;
} {
  const [search, setSearch] = useSearchParams();
  const put = (id: string | null) =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        if (id === null) next.delete("edit");
        else next.set("edit", id);
        return next;
      },
      { preventScrollReset: true },
    );
  return { editing: search.get("edit"), edit: put, close: () => put(null) };
}
