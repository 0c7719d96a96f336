import type { TokenScope } from "../../shared/schemas/api-token";
import type { MarkWord } from "../../shared/schemas/draw";
import type { RefusalInput } from "../../shared/schemas/fit";
import type { SiteKey } from "./programme";

/** The year that is looked at, drawn from and reported is that of the day so long ago: in January it is the one before. */
export const AUDITED_DAYS_AGO = 30;

/** Letters of results went out on these days before filling. Whom they are to depends on who wore a dosimeter. */
export const LETTERS_DAYS_AGO = [56, 49, 42, 35, 28, 21, 14, 8] as const;
/** Letters that have lain for so long were read, by the link in the mail or signed on paper some days later; not these. */
export const READ_AFTER_DAYS = 10;
export const SIGNED_AFTER_DAYS = 2;
export const UNREAD: readonly string[] = ["4417", "2875", "4002"];

/** Tokens for other systems: one whose time is over, one that was ended, one that works. */
export const TOKENS: readonly {
  by: string;
  name: string;
  scopes: readonly TokenScope[];
  madeDaysAgo: number;
  days: number;
  isEnded?: true;
}[] = [
  {
    by: "s.ferrand",
    name: "Works dashboard in the canteen",
    scopes: ["read-programme"],
    madeDaysAgo: 50,
    days: 30,
  },
  {
    by: "s.ferrand",
    name: "Tool store tablet, lost in the yard",
    scopes: ["enter-readings"],
    madeDaysAgo: 40,
    days: 365,
    isEnded: true,
  },
  {
    by: "s.ferrand",
    name: "Charging rack of the dosimeters",
    scopes: ["read-programme", "enter-readings"],
    madeDaysAgo: 20,
    days: 365,
  },
];

/** Who has the calendar by a private address. */
export const CALENDAR_FEEDS = ["s.ferrand", "d.calloway"] as const;

/** Who does without which mail: it stands on the own page all the same. */
export const DOES_WITHOUT = [{ by: "v.arcenault", off: ["own-limit"] }] as const;

/** Who would not or could not wear a device, and why. */
export const REFUSALS: readonly {
  worker: string;
  model: string;
  kind: RefusalInput["kind"];
  daysAgo: number;
  reason: string;
}[] = [
  {
    worker: "4419",
    model: "Alder foam",
    kind: "refused",
    daysAgo: 13,
    reason: "Plugs press after an hour; would rather wear something over the ear.",
  },
  {
    worker: "2891",
    model: "Fenmuff low",
    kind: "cannot-wear",
    daysAgo: 34,
    reason: "The face shield's harness sits where the band goes.",
  },
];

/** A paper that the officer put with D. Tavernor's open finding. */
export const PAPER = {
  worker: "4417",
  fileName: "fettling-booth-4.pdf",
  title: "Booth 4: what was agreed with the fettlers",
  lead: "Nobody stands between the casting and a bare wall any more.",
  says: [
    "The bench moves from the corner to the middle of the booth, so that the casting is not beside two walls.",
    "The back and both side walls get absorbing lining up to 2.4 m, washable, fixed by the site's own joiner.",
    "Until then nobody chips in booth 4 for more than an hour a shift.",
  ],
} as const;

/** What the auditor drew and how each record was marked, by its place in the draw. */
export const DRAW: {
  by: string;
  site: SiteKey;
  seed: string;
  marks: readonly { word: MarkWord; note: string }[];
} = {
  by: "e.lindahl",
  site: "ostmere",
  seed: "gatepost 41",
  marks: [
    { word: "in-order", note: "" },
    { word: "in-order", note: "" },
    { word: "question", note: "Who drew up the times of the tasks, the worker or the supervisor?" },
    { word: "in-order", note: "Checked against the crew's own sheet." },
    { word: "in-order", note: "" },
    { word: "in-order", note: "" },
  ],
};

/** Whose records were erased at the end of their term: one proposed it, another approved it. */
export const ERASED = {
  site: "kettle-bend",
  number: "0217",
  proposedBy: "d.calloway",
  approvedBy: "t.abernathy",
} as const;

/** A site that is to be sold: one proposed to hand its records over, and somebody else has to approve it. */
export const TRANSFER = {
  site: "kettle-bend",
  by: "d.calloway",
  successor: "Saltmarch Plate Company",
  passesInDays: 130,
  note: "The plate shop is sold with its people. They ask for the records from the first day on.",
} as const;
