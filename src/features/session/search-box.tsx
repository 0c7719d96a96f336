import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useDeferredValue, useId, useState } from "react";
import { useNavigate } from "react-router-dom";
import { api } from "../../lib/api";
import { paths } from "../../paths";

interface Hit {
  id: string;
  label: string;
  note: string;
  to: string;
}

interface Found {
  workers: { id: string; name: string; employeeNumber: string }[];
  crews: { id: string; name: string }[];
  tasks: { id: string; name: string }[];
  protectors: { id: string; name: string }[];
}

const reply = { parse: (value: unknown) => value as Found };

/** Search by name or number from every page: type, arrow down, Enter. */
export function SearchBox() {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const listId = useId();
  const [text, setText] = useState("");
  const [isOpen, setIsOpen] = useState(false);
  const [active, setActive] = useState(0);
  const q = useDeferredValue(text.trim());
  const { data } = useQuery({
    queryKey: ["search", q],
    queryFn: ({ signal }) => api.get("/search", { query: { q }, schema: reply, signal }),
    enabled: q.length >= 2,
    placeholderData: (before) => before,
  });
  const hits: Hit[] =
    !data || q.length < 2
      ? []
      : [
          ...data.workers.map(({ id, name, employeeNumber }) => ({
            id,
            label: name,
            note: employeeNumber,
            to: paths.worker(id),
          })),
          ...data.crews.map(({ id, name }) => ({
            id,
            label: name,
            note: i18n.t("crew"),
            to: paths.crew(id),
          })),
          ...data.tasks.map(({ id, name }) => ({
            id,
            label: name,
            note: i18n.t("task"),
            to: paths.task(id),
          })),
          ...data.protectors.map(({ id, name }) => ({
            id,
            label: name,
            note: i18n.t("protector"),
            to: paths.protector(id),
          })),
        ];
  const go = (hit: Hit | undefined) => {
    if (!hit) return;
    setText("");
    setIsOpen(false);
    void navigate(hit.to);
  };
  const shows = isOpen && q.length >= 2;
  return (
    <div className="search-box">
      <input
        type="search"
        role="combobox"
        aria-label={i18n.t("Search by name or number")}
        placeholder={i18n.t("Name or number")}
        aria-expanded={shows}
        aria-controls={listId}
        aria-autocomplete="list"
        aria-activedescendant={shows && hits[active] ? `${listId}-${active}` : undefined}
        value={text}
        onChange={(event) => {
          setText(event.target.value);
          setIsOpen(true);
          setActive(0);
        }}
        onBlur={() => setIsOpen(false)}
        onKeyDown={(event) => {
          if (event.key === "ArrowDown") setActive((index) => Math.min(index + 1, hits.length - 1));
          else if (event.key === "ArrowUp") setActive((index) => Math.max(index - 1, 0));
          else if (event.key === "Enter") go(hits[active]);
          else if (event.key === "Escape") setIsOpen(false);
          else return;
          event.preventDefault();
        }}
      />
      {shows && (
        <div id={listId} className="search-found" role="listbox" aria-label={i18n.t("Found")}>
          {hits.map((hit, index) => (
            <div
              key={hit.id}
              id={`${listId}-${index}`}
              role="option"
              tabIndex={-1}
              aria-selected={index === active}
              onMouseDown={(event) => {
                event.preventDefault();
                go(hit);
              }}
            >
              {hit.label} <span>{hit.note}</span>
            </div>
          ))}
          {hits.length === 0 && <div className="is-empty">{i18n.t("Nothing found.")}</div>}
        </div>
      )}
    </div>
  );
}
