// The shapes of the case format and of replies. Go decides them; see sim/casebook, sim/evidence and sim/service.
export interface Law {
  family: string;
  tiers?: { energy: number; weight: number }[];
  knots?: [number, number][]; // energy, density
  density?: string;
  [field: string]: unknown;
}

export interface Growth {
  links: number;
  members: number;
  seed: number;
  start: string;
  headStart: number;
  openShare: number;
  distinct: boolean;
  ceiling: number;
  kernel: number;
  levy: { above: number; rate: number };
  fading: number;
  idling: number;
  expiry: number;
  leversFrom: number;
  [field: string]: unknown;
}

export interface OutlookSettings {
  horizon: number;
  runs: number;
  limit: number;
}

export interface Entry {
  title: string;
  note: string;
  law: Law;
  sharpness: number;
  growth: Growth;
  outlook: OutlookSettings;
}

export interface Range {
  estimate: number | null;
  low: number | null;
  high: number | null;
}

export interface EvidenceMember {
  id: string;
  links: number;
  arrived: number;
  fitness?: Range;
  origin?: { mean: number; early: number; good: number; chance: number; range: [number, number] };
}

export interface Evidence {
  label: string;
  named: boolean;
  rows: number;
  used: number;
  leftOut: Record<string, number>;
  members: number;
  links: number;
  choices: number;
  perArrival: number;
  top4: number;
  hhi: number;
  gini: number;
  verdict: string;
  groundIntegral: Range;
  margin: Range;
  check: { verdict: string; reasons: string[] };
  notes: string[];
  law: unknown;
  top: EvidenceMember[];
  track: { members: number[]; share: number[]; top4: number[]; hhi: number[] };
  forecast?: Forecast | null;
  [field: string]: unknown;
}

/** Quantiles of a share at the sizes of a forecast. */
export interface Band { q025: number[]; q10: number[]; q50: number[]; q90: number[]; q975: number[] }

/** How shares go on by the extended rule; sizes in links. */
export interface Forecast {
  given: boolean;
  links: number[];
  leader: Band;
  topTen: Band;
  today: Band;
  same: number;
  factor: number;
  past: { links: number[]; leader: Band; truth: number[]; inside: number };
}

export interface Casebook {
  casebook: number;
  title: string;
  entries: Entry[];
  evidence: Evidence | null;
}

export interface Field {
  name: string;
  label: string;
  low: number;
  high: number;
  open: boolean;
  slide: [number, number];
  step: number;
  default: number;
  help: string;
}

export interface Family {
  name: string;
  title: string;
  formula: string;
  help: string;
  fields: Field[];
  listed: boolean;
}

export interface Lever {
  name: string;
  label: string;
  unit: string;
  low: number;
  high: number;
  slide: [number, number];
  step: number;
  off: number;
  yes: boolean;
  help: string;
}

export interface Tables {
  families: Family[];
  levers: Lever[];
  caution: string;
  demo: Casebook;
  demoOpen: number;
  newEntry: Entry;
  limits: { members: number; links: number; sharpness: number; runs: number; rows: number; bytes: number; code: number; title: number; note: number; knots: number; tiers: number; formula: number };
}

export interface Verdict {
  regime: string;
  heading: string;
  line: string;
  reason: string;
  margin: string;
  atSize: string;
}

export interface Curves {
  eps: number[];
  density: number[];
  exponent: number[] | null;
  occupation: (number | null)[] | null;
  pull: number[] | null;
  beta: number[] | null;
  betaMuOver: number[] | null;
  fitness: number[] | null;
  fitnessDensity: (number | null)[] | null;
  levels: { eps: number; weight: number; fitness: number; pull: number | null }[];
}

export interface Solved {
  regime: string;
  balance: number;
  groundIntegral: number | null;
  margin: number | null;
  mu: number | null;
  betaMu: number | null;
  condensate: number;
  leaderExponent: number | null;
  halving: number | null;
  criticalSharpness: number | null;
  meanFitness: number | null;
  degreeExponent: number | null;
  muSlope: number | null;
  edge: { theta: number | null; uncertainty: number | null; atom: number };
  errors: { groundIntegral: number | null; mu: number | null; criticalSharpness: number | null };
  dissolve: { headStart: number | null; openShare: number | null };
  verdict: Verdict;
  curves?: Curves;
}

export interface Grown {
  members: number;
  from: number;
  links: number;
  leader: { id: string; share: number; energy: number; fitness: number; arrived: number };
  top4: number;
  hhi: number;
  gini: number;
  leadChanges: number;
  muAtSize: number | null;
  betaMuAtSize: number | null;
  ranking: { id: string; member: number; share: number; energy: number }[];
  reigns: { leader: number; from: number }[];
  path: { members: number[]; leader: number[]; share: number[]; top4: number[]; hhi: number[]; gini: number[]; betaMu: (number | null)[]; followed: number[][]; levels: number[][] };
  tail: { links: number[]; share: number[] };
  counted?: { eps: number; n: number; error: number; members: number }[]; // none where the theory does not cover the rule
  digest?: string;
}

export interface MemberReport {
  links: number;
  share: number;
  rank: number;
  of: number;
  energy: number;
  within: number;
  pull: number;
  chose: number[];
  arrived: number;
}

export interface Quantiles {
  mean: number;
  q025: number;
  q10: number;
  q50: number;
  q90: number;
  q975: number;
}

export interface Outlook {
  runs: number;
  members: number;
  horizon: number;
  today: number;
  leaderShare: Quantiles;
  top4: Quantiles;
  hhi: Quantiles;
  past: { limit: number; chance: number; error: number };
  sameLeader: { chance: number; error: number };
  bySize: ({ members: number } & Quantiles)[];
  sentences: string[];
}

export interface Mapping {
  comma: string;
  header: boolean;
  source: number;
  target: number;
  time: number;
  leaveReplies: boolean;
  newcomersOnly: boolean;
}

export interface Preview {
  columns: string[];
  rows: string[][];
  mapping: Mapping;
  why: string;
}

export interface ReadReport {
  rows: number;
  used: number;
  problems: { reason: string; count: number; first: string[] }[];
  members: number;
  links: number;
  choices: number;
  leader: { id: string; links: number; share: number };
  top4: number;
  hhi: number;
  gini: number;
}

export interface Studied {
  evidence: Evidence;
  heading: string;
  meaning: string;
  explained: string;
  caution: string;
  entry?: Entry;
}
