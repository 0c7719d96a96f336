import { useLingui } from "@lingui/react";
import { type ReactNode, useLayoutEffect, useRef, useState } from "react";
import { Link, NavLink, useLocation } from "react-router-dom";
import { usePageTitle } from "../lib/page-title";

export interface NavItem {
  readonly to: string;
  readonly label: string;
}

/** The mark: a fall from the outer tick to the inner one. */
function Mark() {
  return (
    <svg width="26" height="22" viewBox="0 0 26 22" aria-hidden="true">
      <path d="M3 11.2 22 4v7.4L3 18.6Z" fill="var(--v6)" />
      <path d="M1 9h2.6v12H1ZM21.6 1h2.4v11h-2.4Z" fill="var(--ink)" />
    </svg>
  );
}

/** Skip link, head and foot of every signed-in page. On a phone the words of the navigation stand at the foot. */
export function Page({
  head,
  folio,
  children,
}: {
  head: ReactNode;
  folio?: ReactNode;
  children: ReactNode;
}) {
  const { i18n } = useLingui();
  return (
    <div className="page">
      <a className="skip-link link" href="#main">
        {i18n.t("Skip to the page")}
      </a>
      {head}
      {children}
      {folio}
    </div>
  );
}

/** `title` stands in place of the product's name where a page is one person's or one crew's. */
export function RunningHead({
  items = [],
  homeTo = "/",
  title = "Dinward",
  place,
  account,
}: {
  items?: readonly NavItem[];
  homeTo?: string;
  title?: string;
  /** Gets the place beside the mark, for what the page says in the title's stead. */
  place?: (element: HTMLElement | null) => void;
  account?: ReactNode;
}) {
  return (
    <header className="running-head">
      <Link className="brand" to={homeTo} aria-label={title}>
        <Mark />
        <span>{title}</span>
      </Link>
      {place && <div className="running-words" ref={place} />}
      {items.length > 0 && <RunningNav items={items} />}
      {account && <div className="running-account">{account}</div>}
    </header>
  );
}

/** A line of words; on a phone, at the foot, those that have room, and the others behind "More". */
function RunningNav({ items }: { items: readonly NavItem[] }) {
  const { i18n } = useLingui();
  const { pathname } = useLocation();
  const list = useRef<HTMLUListElement>(null);
  const [hides, setHides] = useState<"nothing" | "words" | "current">("nothing");
  const [openAt, setOpenAt] = useState<string | null>(null);
  // Where the next page opens, the words are together again.
  const isOpen = openAt === pathname;
  // biome-ignore lint/correctness/useExhaustiveDependencies: another page or language is other words
  useLayoutEffect(() => {
    const words = list.current;
    if (!words || isOpen || typeof ResizeObserver === "undefined") return;
    const measure = () => {
      const links = [...words.querySelectorAll<HTMLElement>("li > a")];
      const current = words.querySelector<HTMLElement>("[aria-current=page]");
      // Against the first word and not the list's height: a line is as high as the reader's text makes it.
      const isBelow = (element: HTMLElement | null | undefined) =>
        element != null && element.offsetTop > (links[0]?.offsetTop ?? 0);
      words.scrollTop = 0;
      setHides(isBelow(current) ? "current" : isBelow(links.at(-1)) ? "words" : "nothing");
    };
    measure();
    const observer = new ResizeObserver(measure);
    observer.observe(words);
    return () => observer.disconnect();
  }, [isOpen, pathname, items.length, i18n.locale]);
  return (
    <nav
      className={`running-nav${isOpen ? " is-open" : ""}${hides === "nothing" ? "" : " has-more"}`}
      aria-label={i18n.t("Pages")}
    >
      <ul ref={list}>
        {items.map((item) => (
          <li key={item.to}>
            <NavLink to={item.to}>{item.label}</NavLink>
          </li>
        ))}
      </ul>
      <button
        type="button"
        className={`running-more${hides === "current" && !isOpen ? " is-current" : ""}`}
        aria-expanded={isOpen}
        onClick={() => setOpenAt(isOpen ? null : pathname)}
      >
        {isOpen ? i18n.t("Fewer") : i18n.t("More")}
      </button>
    </nav>
  );
}

/** The part between head and folio; `margin` stands at the right and goes below on a narrow window. */
export function PageBody({
  children,
  margin,
  marginWidthPx = 220,
  size = "officer",
}: {
  children: ReactNode;
  margin?: ReactNode;
  marginWidthPx?: number;
  size?: "officer" | "worker";
}) {
  return (
    <div
      className={`page-body${margin ? " has-margin" : ""}${size === "worker" ? " is-worker-size" : ""}`}
      style={{ "--margin-column": `${marginWidthPx}px` } as React.CSSProperties}
    >
      <main id="main" className="page-main" tabIndex={-1}>
        {children}
      </main>
      {margin && <MarginColumn>{margin}</MarginColumn>}
    </div>
  );
}

export function MarginColumn({ children }: { children: ReactNode }) {
  return <aside className="margin-column">{children}</aside>;
}

export function MarginNote({
  title,
  isRuled = false,
  children,
}: {
  title?: ReactNode;
  isRuled?: boolean;
  children: ReactNode;
}) {
  return (
    <section className={`margin-note${isRuled ? " is-ruled" : ""}`}>
      {title && <h2>{title}</h2>}
      {children}
    </section>
  );
}

/** Name, dots, figure. */
export function Leaders({
  items,
}: {
  items: readonly { label: ReactNode; value: ReactNode; key: string }[];
}) {
  return (
    <dl className="leaders">
      {items.map((item) => (
        <div key={item.key}>
          <dt>{item.label}</dt>
          <dd>{item.value}</dd>
        </div>
      ))}
    </dl>
  );
}

/** Title, one sentence that says what matters, and at the right what can be done (one primary). */
export function PageHead({
  title,
  way,
  lead,
  actions,
}: {
  title: ReactNode;
  /** Where this page lies: links from the general to the special. */
  way?: ReactNode;
  lead?: ReactNode;
  actions?: ReactNode;
}) {
  const { i18n } = useLingui();
  const heading = useRef<HTMLHeadingElement>(null);
  usePageTitle(heading);
  return (
    <div className="page-head">
      <div className="page-head-words">
        {way && (
          <nav className="way" aria-label={i18n.t("Where this page lies")}>
            {way}
          </nav>
        )}
        <h1 ref={heading}>{title}</h1>
        {lead && <p className="lead">{lead}</p>}
      </div>
      {actions && <div className="page-actions">{actions}</div>}
    </div>
  );
}

export function Section({
  title,
  id,
  children,
}: {
  title: ReactNode;
  id: string;
  children: ReactNode;
}) {
  return (
    <section className="section" aria-labelledby={id}>
      <h2 id={id}>{title}</h2>
      {children}
    </section>
  );
}

/** Foot of the page: rule set and version, method; at the right the caution. */
export function Folio({ children, caution }: { children?: ReactNode; caution?: ReactNode }) {
  const { i18n } = useLingui();
  return (
    <footer className="folio">
      <span>{children}</span>
      <span>{caution ?? i18n.t("An aid to screening. A qualified hygienist decides.")}</span>
    </footer>
  );
}
