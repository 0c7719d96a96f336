/** Days are counted from the day of filling: 1 is tomorrow. */
interface Planned {
  by: string;
  crew: string;
  worker: string;
  inDays: readonly [first: number, last: number];
}

export const ABSENCES: readonly Planned[] = [
  { by: "p.lanyon", crew: "Fettling days", worker: "4425", inDays: [1, 4] },
  { by: "b.rowntree", crew: "Test cell days", worker: "3340", inDays: [2, 2] },
];

export const LOANS: readonly (Planned & { to: string })[] = [
  {
    by: "p.lanyon",
    crew: "Fettling days",
    worker: "4433",
    to: "Test cell days",
    inDays: [2, 6],
  },
];

export const HAND_OVERS = [
  {
    by: "p.lanyon",
    to: "s.ferrand",
    crew: "Fettling days",
    note: "The extraction at the second grinder rattles; the fitter comes at ten.",
    minutesAgo: 90,
    isRead: true,
  },
  {
    by: "s.ferrand",
    to: "b.rowntree",
    crew: "Test cell days",
    note: "New foam plugs are in the upper drawer. Nobody into the cell before the door seal is changed.",
    minutesAgo: 40,
    isRead: false,
  },
] as const;

export const DAILY_MAILS = [{ person: "b.rowntree", hour: 5 }] as const;
