import { useLingui } from "@lingui/react";
import type { CrewProgress } from "../../../shared/schemas/waiting";
import { TextLink } from "../../components/link";
import { paths } from "../../paths";
import { crewEnd, crewMoment } from "./due";

const DAY_MIN = 1440;
const minutesOf = (time: string): number =>
  Number(time.slice(0, 2)) * 60 + Number(time.slice(3, 5));

/** The crews of one time zone against 24 hours, with now, and how far each day is entered. */
export function CrewRibbon({
  crews,
  nowTime,
  title,
}: {
  crews: readonly CrewProgress[];
  nowTime: string;
  title?: string;
}) {
  const { i18n } = useLingui();
  // The axis begins with the first shift that starts after the night's, at an even hour.
  const starts = crews.map(({ start }) => minutesOf(start)).filter((min) => min >= 240);
  const fromMin = Math.floor(Math.min(360, ...starts) / 120) * 120;
  const place = (min: number) => (((min - fromMin + DAY_MIN) % DAY_MIN) / DAY_MIN) * 100;
  const nowAt = place(minutesOf(nowTime));
  const hours = Array.from({ length: 13 }, (_, step) => ({
    step,
    hour: (fromMin / 60 + step * 2) % 24,
  }));
  return (
    <section className="ribbon" aria-label={title ?? i18n.t("Crews today")}>
      {title && <h2 className="ribbon-title">{title}</h2>}
      <div className="ribbon-axis" aria-hidden="true">
        {hours.map(({ step, hour }) => {
          const at = (step / 12) * 100;
          const isHidden = Math.abs(at - nowAt) < 4.5;
          return (
            <span key={step} className="ribbon-hour" style={{ left: `${at}%` }}>
              {isHidden ? "" : String(hour).padStart(2, "0")}
            </span>
          );
        })}
        <span className="ribbon-now" style={{ left: `${nowAt}%` }}>
          <b>{nowTime}</b>
        </span>
      </div>
      <span className="ribbon-entered-head">{i18n.t("days entered")}</span>
      <ul>
        {crews.map((crew) => (
          <CrewRow key={crew.id} crew={crew} nowTime={nowTime} place={place} nowAt={nowAt} />
        ))}
      </ul>
    </section>
  );
}

function CrewRow({
  crew,
  nowTime,
  place,
  nowAt,
}: {
  crew: CrewProgress;
  nowTime: string;
  place: (min: number) => number;
  nowAt: number;
}) {
  const { i18n } = useLingui();
  const from = place(minutesOf(crew.start));
  const to = Math.min(100, from + (crew.lengthMin / DAY_MIN) * 100);
  const moment = crewMoment(crew, nowTime);
  const done =
    moment === "over" ? to : moment === "running" ? Math.min(to, Math.max(from, nowAt)) : from;
  return (
    <li>
      <span className="ribbon-name">
        {crew.name}
        <span className="sr-only">
          {i18n.t("{start} to {end}", { start: crew.start, end: crewEnd(crew) })}
        </span>
      </span>
      <span className="ribbon-track" aria-hidden="true">
        {done > from && (
          <span className="ribbon-done" style={{ left: `${from}%`, width: `${done - from}%` }} />
        )}
        {to > done && (
          <span className="ribbon-open" style={{ left: `${done}%`, width: `${to - done}%` }} />
        )}
        <span className="ribbon-line" style={{ left: `${nowAt}%` }} />
      </span>
      <span className="ribbon-entered">
        <Entered crew={crew} isAhead={moment === "ahead"} />
      </span>
    </li>
  );
}

function Entered({ crew, isAhead }: { crew: CrewProgress; isAhead: boolean }) {
  const { i18n } = useLingui();
  const expected = Math.max(0, crew.members - crew.absent);
  const waits = Math.max(0, expected - crew.saved);
  // Who is marked absent is entered, as on the day's own page.
  const entered = crew.saved + crew.absent;
  if (expected === 0 && crew.saved === 0) return <>{i18n.t("nobody expected")}</>;
  const words =
    isAhead && crew.saved === 0
      ? i18n.t("starts {time}", { time: crew.start })
      : waits === 0
        ? i18n.t("{saved} of {expected} saved", {
            saved: entered,
            expected: Math.max(crew.members, entered),
          })
        : i18n.t("{saved} saved, {waits} wait", { saved: entered, waits });
  return (
    <TextLink
      className={waits > 0 && !isAhead ? "is-open" : "is-quiet"}
      to={paths.day(crew.id, crew.date)}
    >
      {words}
      <span className="sr-only">{i18n.t(", day of {crew}", { crew: crew.name })}</span>
    </TextLink>
  );
}
