/** A document that the arithmetic follows. `read`: in a copy of it; `reprint`: in a reprint; else from memory. */
export interface Source {
  /** English, and a message of the catalogue, as is an edition that is more than a year. */
  readonly title: string;
  readonly edition: string;
  /** What its clauses stand on, and what is open about it. */
  readonly note: string;
  readonly status: "read" | "reprint" | "from-memory" | "derived";
}

/** Every source that a docstring or a working names by its id. */
export const SOURCES = {
  "iso-9612-2009": {
    title: /*i18n*/ "ISO 9612, Determination of occupational noise exposure, engineering method",
    edition: "2009",
    note: "Clauses and Annex C from memory; Table C.4 agrees with its own definition. A third edition appeared in 2025 and is not followed here.",
    status: "from-memory",
  },
  "iso-4869-2": {
    title: /*i18n*/ "ISO 4869-2, Effective A-weighted levels when hearing protectors are worn",
    edition: /*i18n*/ "2018, by pooled means and deviations as in 1994",
    note: "Reference noises read in a translation from 125 Hz to 1 kHz and in part above; the rest from memory, every row summing to 100.0 dB.",
    status: "from-memory",
  },
  "en-458": {
    title: /*i18n*/ "EN 458, Selection, use, care and maintenance of hearing protectors",
    edition: "2016",
    note: "Bands of 5 dB below the action value, and what H, M and L give against impulses by their type, from memory.",
    status: "from-memory",
  },
  "eu-2003-10-ec": {
    title: "Directive 2003/10/EC on noise at work",
    edition: "2003",
    note: "Values read; the comparator of each duty from memory.",
    status: "from-memory",
  },
  "osha-1910.95": {
    title: /*i18n*/ "29 CFR 1910.95, Occupational noise exposure, with appendices A and B",
    edition: /*i18n*/ "as amended 1983",
    note: "Paragraphs (a), (b) and the tables read.",
    status: "read",
  },
  "osha-otm": {
    title: /*i18n*/ "OSHA Technical Manual, section III, chapter 5, Noise",
    edition: /*i18n*/ "as last revised",
    note: "Derating and double protection, in a reprint.",
    status: "reprint",
  },
  "niosh-98-126": {
    title:
      /*i18n*/ "NIOSH 98-126, Criteria for a recommended standard, occupational noise exposure",
    edition: "1998",
    note: "Tables in a reprint; the order of derating from memory.",
    status: "reprint",
  },
  "fra-49cfr227": {
    title: "49 CFR 227, Occupational noise exposure for railroad operating employees, Appendix B",
    edition: "2006",
    note: "Factors and order of derating.",
    status: "read",
  },
  "nr-15": {
    title: /*i18n*/ "NR-15, Atividades e operações insalubres, annexes 1 and 2",
    edition: "1978",
    note: "Tables in a reprint.",
    status: "reprint",
  },
  "ansi-s12.68": {
    title:
      /*i18n*/ "ANSI/ASA S12.68, Methods of estimating effective A-weighted sound pressure levels when hearing protectors are worn",
    edition: "2007",
    note: "The rating pair is taken from the label; its use from memory.",
    status: "from-memory",
  },
  "as-nzs-1270": {
    title: /*i18n*/ "AS/NZS 1270, Acoustic hearing protectors",
    edition: "2002",
    note: "SLC80 is taken from the label and comes off the C-weighted level; the classes from memory. It is not recomputed from bands: the reference noise was not read.",
    status: "from-memory",
  },
  "iec-61252": {
    title: "IEC 61252, Personal sound exposure meters",
    edition: "1993, amended 2000",
    note: "Sound exposure in Pa²h.",
    status: "from-memory",
  },
  "iec-61260-1": {
    title: "IEC 61260-1, Octave-band and fractional-octave-band filters",
    edition: "2014",
    note: "Base-ten mid frequencies and band edges.",
    status: "from-memory",
  },
  "iec-61672-1": {
    title: "IEC 61672-1, Sound level meters",
    edition: "2013",
    note: "Weightings at the nominal mid frequencies; 67 of 68 agree with the analytic form.",
    status: "from-memory",
  },
  "iec-60942": {
    title: "IEC 60942, Sound calibrators",
    edition: "2017",
    note: "Frequency within 2 % for class 2, from memory.",
    status: "from-memory",
  },
  "elliott-2001": {
    title: "S. J. Elliott, Signal Processing for Active Control",
    edition: "2001",
    note: "Two waves of opposite sign: |1 − g·exp(−jφ)|², and what follows from it.",
    status: "derived",
  },
  "welch-1967": {
    title:
      "P. D. Welch, The use of fast Fourier transform for the estimation of power spectra: averaging over short, modified periodograms",
    edition: "IEEE Transactions on Audio and Electroacoustics 15, 1967",
    note: "Segments that overlap by half under a Hann window; scaled by the window's power.",
    status: "derived",
  },
  "knapp-carter-1976": {
    title:
      "C. H. Knapp, G. C. Carter, The generalized correlation method for estimation of time delay",
    edition: "IEEE Transactions on Acoustics, Speech and Signal Processing 24, 1976",
    note: "Phase transform, and weighting by coherence, from memory.",
    status: "from-memory",
  },
  "iso-11904-1": {
    title:
      /*i18n*/ "ISO 11904-1, Sound immission from sources close to the ear, microphone in a real ear",
    edition: "2002",
    note: "Diffuse-field response of the open ear at the eardrum, from memory.",
    status: "from-memory",
  },
  "land-1971": {
    title: "C. E. Land, Confidence intervals for linear functions of the normal mean and variance",
    edition: "1971",
    note: "Exact limit of a log-normal mean, derived from its definition.",
    status: "derived",
  },
  "wearing-time": {
    title: /*i18n*/ "Mean of a level over the time worn and the time not worn",
    edition: /*i18n*/ "closed form",
    note: "Follows from the definition of the exchange-rate mean.",
    status: "derived",
  },
  "epa-40-cfr-211": {
    title: /*i18n*/ "40 CFR 211, Product noise labeling, subpart B, hearing protective devices",
    edition: /*i18n*/ "as first issued 1979",
    note: "211.207 with its worked example read in several copies.",
    status: "read",
  },
  "iso-7731": {
    title: /*i18n*/ "ISO 7731, Danger signals for public and work areas, auditory danger signals",
    edition: "2003",
    note: "Masked threshold by octave band and 10 dB above it from memory; the slope of 7.5 dB an octave agrees with a public description.",
    status: "from-memory",
  },
  "iso-389-7": {
    title:
      /*i18n*/ "ISO 389-7, Reference threshold of hearing under free-field and diffuse-field listening conditions",
    edition: "2005",
    note: "Frontal free-field thresholds at the octave frequencies, from memory.",
    status: "from-memory",
  },
  "iso-guide-98-3": {
    title: /*i18n*/ "ISO/IEC Guide 98-3, Guide to the expression of uncertainty in measurement",
    edition: "2008",
    note: "Uncertainty of a mean and of independent parts together.",
    status: "from-memory",
  },
  "programme-audio": {
    title: /*i18n*/ "Sound of a programme and of the noise at one ear",
    edition: /*i18n*/ "closed form",
    note: "Two sounds that know nothing of each other add by energy; under an exchange rate the weight of the sum is convex.",
    status: "derived",
  },
  "berger-2003": {
    title:
      "E. H. Berger, R. W. Kieper, D. Gauger, Hearing protection: Surpassing the limits to attenuation imposed by the bone-conduction pathways",
    edition: "JASA 114, 2003",
    note: "Limits by octave band from memory, to some 3 dB; published summaries give 40 to 60 dB across frequency with the least at 2 kHz.",
    status: "from-memory",
  },
  "johnson-welch-1940": {
    title: "N. L. Johnson, B. L. Welch, Applications of the non-central t-distribution",
    edition: "Biometrika 31, 1940",
    note: "Tolerance factor and exceedance bound, integrated from the definition; agree with printed factors.",
    status: "derived",
  },
  "cohen-1961": {
    title:
      "A. C. Cohen, Tables for maximum likelihood estimates: singly truncated and singly censored samples",
    edition: "Technometrics 3, 1961",
    note: "The same likelihood, maximized numerically and for several thresholds.",
    status: "derived",
  },
  "hirsch-stedinger-1987": {
    title:
      "R. M. Hirsch, J. R. Stedinger, Plotting positions for historical floods and their precision",
    edition: "Water Resources Research 23, 1987",
    note: "Plotting positions beside samples below several thresholds, from memory.",
    status: "from-memory",
  },
  "grubbs-1969": {
    title: "F. E. Grubbs, Procedures for detecting outlying observations in samples",
    edition: "Technometrics 11, 1969",
    note: "Critical values computed from Student's t.",
    status: "derived",
  },
  "searle-1992": {
    title: "S. R. Searle, G. Casella, C. E. McCulloch, Variance Components",
    edition: "1992",
    note: "One-way analysis of variance with classes of unequal size, from memory.",
    status: "from-memory",
  },
} as const satisfies Record<string, Source>;

export type SourceId = keyof typeof SOURCES;
