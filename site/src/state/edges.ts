// Where the document meets the engines: effects that ask, and take answers in.
import { batch, effect, signal } from "@preact/signals";
import type { Reply } from "../engine/engine";
import { column } from "../engine/wire";
import { current, doc, isDragging, projection, say, tables } from "./document";
import { engines, digests, fault, grown, growing, outlookFault, outlooks, reached, running, sentenceOf, solved, waitingToGrow, type Digest } from "./results";
import { keep, kept } from "./storage";
import type { Casebook, Curves, Entry, Grown, Outlook, Solved } from "./types";
import { follow, quick, said, shown, theme } from "./view";
import { percent, count } from "../words/format";

/** Larger networks are grown only when asked for. */
const unasked = 1_000_000;
/** Up to this size the engine that grows a network while something is dragged paints it too. */
const painted = 100_000;

/** The bytes of the network on show, for the stage. */
export const network = signal<Uint8Array<ArrayBuffer> | undefined>(undefined);

/** A number for every evidence seen: two logs may share name and size. Evidence is replaced whole, never changed. */
const numbers = new WeakMap<object, number>();
let evidences = 0;
function numberOf(e: object): number {
  const known = numbers.get(e) ?? ++evidences;
  numbers.set(e, known);
  return known;
}

/** What the stage shows, for an engine to paint; undefined while there is no stage. */
export type StageView = () => Record<string, unknown> | undefined;
let stageView: StageView = () => undefined;
export const paintFor = (view: StageView): void => { stageView = view; };

/** The question the open entry asks, as text: equal text, equal answer. */
export function keyOf(book: Casebook): string {
  return JSON.stringify(book.entries[0]) + (book.evidence ? `|${numberOf(book.evidence)}` : "");
}

function report(e: unknown): void {
  const s = sentenceOf(e);
  if (!s) return;
  takeEarly(); // else the solution that waits would wipe the fault away
  fault.value = s;
}

async function askSolve(book: Casebook, key: string): Promise<void> {
  try {
    const r = await engines.side.askNewest<Solved>("solve", { casebook: book, entry: 0, curves: true, columns: true });
    if (r) takeSolved(withCurves(r), key);
  } catch (e) {
    report(e);
  }
}

/** While something is dragged a solution waits a moment for its network, so that each chart is drawn once for both. */
const patience = 60;
let early: { solution: () => void; timer: number } | undefined;

/** Puts the curves, which come as raw numbers, where they have their names. */
function withCurves(r: Reply<Solved>): Solved {
  const curves: Record<string, unknown> = { ...r.body.curves };
  for (const c of r.columns) curves[c.name] = Array.from(c.data, (v) => (Number.isFinite(v) ? v : null));
  return { ...r.body, curves: curves as unknown as Curves };
}

function takeSolved(value: Solved, key: string): void {
  const solution = (): void => batch(() => { solved.value = { key, value }; fault.value = undefined; });
  if (early) clearTimeout(early.timer);
  early = undefined;
  if (quick.peek()) early = { solution, timer: window.setTimeout(takeEarly, patience) };
  else solution();
}

function takeEarly(): void {
  if (early) clearTimeout(early.timer);
  early?.solution();
  early = undefined;
}

let growth: AbortController | undefined;
let growthSince = 0;
/** How long a growth may still run when a newer one is asked for: short ones end, so that a drag shows every step. */
const grace = 250;

async function askGrow(book: Casebook, key: string): Promise<void> {
  const before = grown.peek();
  const older = growth;
  if (older) setTimeout(() => older.abort(), Math.max(0, growthSince + grace - performance.now()));
  else growthSince = performance.now();
  const mine = (growth = new AbortController());
  try {
    const r = await engines.main.askNewest<Grown>("grow", () => ({ casebook: book, entry: 0, columns: true, view: quick.peek() && book.entries[0]!.growth.members <= painted ? stageView() : undefined }), {
      signal: mine.signal,
      progress: (p) => { if (p.seconds > 0.3) growing.value = { done: p.done, what: p.what }; },
    });
    if (r) takeGrown(r, key, before?.value);
  } catch (e) {
    report(e);
  } finally {
    growthSince = performance.now(); // when the one that waited, if any, began
    if (growth === mine) {
      growth = undefined;
      growing.value = undefined;
    }
  }
}

export function cancelGrowth(): void {
  growth?.abort();
}

/** Puts shares over size, which come as raw numbers, where they have their names. */
function withPath(r: Reply<Grown>): Grown {
  const path: Record<string, unknown> = {}, lists: Record<string, number[][]> = { followed: [], levels: [] };
  for (const c of r.columns) {
    const [part, name = "", index] = c.name.split(".");
    if (part !== "path") continue;
    const list = Array.from(c.data, (v) => (Number.isFinite(v) ? v : null));
    if (index === undefined) path[name] = list;
    else (lists[name] ??= [])[Number(index)] = list as number[];
  }
  return { ...r.body, path: { ...path, ...lists } as unknown as Grown["path"] };
}

function takeGrown(r: Reply<Grown>, key: string, before: Grown | undefined): void {
  batch(() => {
    takeEarly();
    // A scrubber that stood at the end stays at the end.
    const atEnd = !before || shown.peek() >= before.members;
    grown.value = { key, value: withPath(r) };
    if (atEnd || shown.peek() > r.body.members || shown.peek() < r.body.from) shown.value = r.body.members;
    if (follow.peek() >= r.body.members) follow.value = -1;
    network.value = r.bytes;
    waitingToGrow.value = undefined;
  });
}

let asked = "";

function ask(force: boolean): void {
  const d = doc.value;
  const c = current.value;
  if (!d || !c) return;
  const book = projection(d.book, c.entry);
  const key = keyOf(book);
  if (key === asked && !force) return;
  asked = key;
  void askSolve(book, key);
  if (c.entry.growth.members > unasked && !force) {
    waitingToGrow.value = key;
    return;
  }
  waitingToGrow.value = undefined;
  void askGrow(book, key);
}

export const growAnyway = (): void => ask(true);

/** Marks and lines of all entries, one after another, when nothing else is asked. */
let marking = false;
async function mark(): Promise<void> {
  if (marking) return;
  marking = true;
  try {
    for (;;) {
      const d = doc.peek();
      const t = theme.peek();
      const next = d?.book.entries.map((e) => projection(d.book, e)).find((b) => !digests.peek().has(markKey(b, t)));
      if (!next) return;
      const digest = await digestOf(next, t);
      digests.value = new Map([...digests.peek(), [markKey(next, t), digest] as const].slice(-400));
    }
  } finally {
    marking = false;
  }
}

export const markKey = (b: Casebook, t: string): string => `${t}|${keyOf(b)}`;

const markSize = 112;

async function digestOf(book: Casebook, t: string): Promise<Digest> {
  try {
    const s = await engines.side.ask<Solved>("solve", { casebook: book, entry: 0 });
    const large = (book.entries[0]?.growth.members ?? 0) > unasked;
    if (large) return { heading: s.body.verdict.heading, line: "Not grown yet.", mark: undefined };
    const g = await engines.side.ask<Grown>("grow", { casebook: book, entry: 0 });
    const p = await engines.side.ask("picture", { width: markSize, height: markSize, scale: 1, members: g.body.members, theme: t, strokes: 700, bare: true });
    const rgba = column<Uint8Array<ArrayBuffer>>(p, "rgba");
    const image = rgba && new ImageData(new Uint8ClampedArray(rgba), markSize, markSize);
    return { heading: s.body.verdict.heading, line: `${g.body.leader.id} leads with ${percent(g.body.leader.share)} at ${count(g.body.members)}.`, mark: image };
  } catch (e) {
    return { heading: "Not computed", line: sentenceOf(e) ?? "", mark: undefined };
  }
}

/** Outlook: chunks of runs over the pool, gathered as they come. */
let outlookStop: AbortController | undefined;

/** What decides the runs of an outlook: the limit only counts them. */
export const runsKey = (book: Casebook, e: Entry): string => `${keyOf(book)}|${e.outlook.horizon}`;
export const outlookKey = (book: Casebook, e: Entry): string => `${runsKey(book, e)}|${e.outlook.limit}`;

/** Parts of outlooks made so far, by what decides them. */
const made = new Map<string, unknown[]>();

async function gather(runs: string, limit: number): Promise<void> {
  const r = await engines.main.ask<Outlook>("gather", { parts: made.get(runs) ?? [], limit });
  outlooks.value = new Map([...outlooks.peek(), [`${runs}|${limit}`, r.body] as const].slice(-200));
}

/** Another limit counts the same runs anew. */
function recount(): void {
  const d = doc.value;
  const c = current.value;
  if (!d || !c) return;
  const book = projection(d.book, c.entry);
  const runs = runsKey(book, c.entry);
  if (made.has(runs) && !outlooks.peek().has(outlookKey(book, c.entry))) void gather(runs, c.entry.outlook.limit).catch(report);
}

export async function runOutlook(): Promise<void> {
  const d = doc.peek();
  const c = current.peek();
  if (!d || !c || running.peek()) return;
  const base = projection(d.book, c.entry);
  const book = { ...base, entries: [{ ...base.entries[0]!, outlook: c.entry.outlook }] };
  const key = outlookKey(base, c.entry);
  const stop = (outlookStop = new AbortController());
  const of = c.entry.outlook.runs;
  batch(() => {
    running.value = { key, done: 0, of, since: performance.now() };
    outlookFault.value = undefined;
  });
  const runs = runsKey(base, c.entry);
  const parts: unknown[] = [];
  let next = 0;
  let inParts = 0;
  const work = async (engine: (typeof engines.pool)[number]): Promise<void> => {
    while (next < of && !stop.signal.aborted) {
      const from = next;
      const to = Math.min(of, from + (from < 20 ? 5 : 10));
      next = to;
      const r = await engine.ask("outlook", { casebook: book, entry: 0, from, to }, { signal: stop.signal });
      parts.push(r.body);
      inParts += to - from;
      const now = running.peek();
      if (now) running.value = { ...now, done: inParts };
      made.set(runs, parts);
      const shownNow = current.peek()?.index === c.index ? current.peek()?.entry : undefined;
      await gather(runs, (shownNow ?? c.entry).outlook.limit);
    }
  };
  const results = await Promise.allSettled(engines.pool.map(work));
  const bad = results.find((r) => r.status === "rejected");
  batch(() => {
    running.value = undefined;
    if (bad) outlookFault.value = sentenceOf(bad.reason);
    if (stop.signal.aborted) say(inParts > 0 ? `Outlook cancelled; the ${inParts} runs made so far are shown.` : "Outlook cancelled before the first run was made.");
  });
}

export function cancelOutlook(): void {
  outlookStop?.abort();
}

/** Once nothing moves: how far the planned size is from endless growth. */
async function askReach(book: Casebook, planned: number): Promise<void> {
  const key = keyOf(book);
  try {
    const r = await engines.side.askNewest<Solved>("solve", { casebook: book, entry: 0, reach: true, planned }, { slot: "reach" });
    if (r) reached.value = { key, value: r.body.verdict.atSize };
  } catch (e) {
    report(e);
  }
}

/** Starts all effects. */
export function connect(): void {
  effect(() => ask(false));
  effect(recount);
  let reachTimer = 0;
  effect(() => {
    const d = doc.value, c = current.value;
    clearTimeout(reachTimer);
    if (!d || !c || quick.value) return;
    const book = projection(d.book, c.entry);
    reachTimer = window.setTimeout(() => void askReach(book, c.entry.outlook.horizon), 250);
  });
  let markTimer = 0;
  effect(() => {
    void doc.value;
    void theme.value;
    if (!tables.value) return;
    clearTimeout(markTimer);
    // While the stage starts, and while something is dragged, marks wait.
    markTimer = window.setTimeout(() => void mark(), !said.peek() ? 2500 : isDragging() ? 900 : 350);
  });
  let keepTimer = 0;
  effect(() => {
    const d = doc.value;
    if (!d) return;
    kept.value = "changed";
    clearTimeout(keepTimer);
    keepTimer = window.setTimeout(() => keep(d.id, d.book, d.keys.indexOf(d.open)), 300);
  });
  window.addEventListener("pagehide", () => {
    const d = doc.peek();
    if (d) keep(d.id, d.book, d.keys.indexOf(d.open));
  });
}
