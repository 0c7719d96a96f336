import type { SiteKey } from "./programme";

/** People who left long before the demo begins. Everybody here is invented. */
export const FORMER_WORKERS: readonly {
  site: SiteKey;
  number: string;
  name: string;
  hiredDaysAgo: number;
  leftDaysAgo: number;
}[] = [
  {
    site: "kettle-bend",
    number: "0217",
    name: "P. Underhill-Sand",
    hiredDaysAgo: 6200,
    leftDaysAgo: 1460,
  },
  {
    site: "kettle-bend",
    number: "0231",
    name: "F. Quarrington",
    hiredDaysAgo: 5400,
    leftDaysAgo: 1210,
  },
  {
    site: "kettle-bend",
    number: "0244",
    name: "V. Olmstead-Ray",
    hiredDaysAgo: 4800,
    leftDaysAgo: 1025,
  },
  {
    site: "ostmere",
    number: "1406",
    name: "M. Thackeray-Voss",
    hiredDaysAgo: 7100,
    leftDaysAgo: 1330,
  },
];

/** Who of each site looks after its records. */
export const OFFICERS: Readonly<Record<SiteKey, string>> = {
  ostmere: "s.ferrand",
  "kettle-bend": "d.calloway",
};

/** Whose records are held, by employee number. */
export const HELD = {
  site: "kettle-bend",
  number: "0231",
  reason: "A claim for hearing loss is before the compensation board.",
} as const;

/** Who outside keeps the trail's head. */
export const HEAD_KEEPER = {
  name: "H. Ardagh, notary",
  email: "ardagh@notary.example",
  language: "en",
} as const;
