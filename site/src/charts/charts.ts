// Charts: data in, element out. Ink is the law, ember the leader, blues its rivals, open circles what was counted.
import type { Band, Curves, Grown, Outlook, Solved } from "../state/types";
import { count, number, percent } from "../words/format";
import { Plane, type Point } from "./plane";

const css = (name: string): string => `var(--${name})`;
const ember = css("ember"), emberText = css("ember-text"), ink = css("ink"), quiet = css("ink-2"), line = css("hairline"), blue = css("r3");
const finite = (x: number | null | undefined): x is number => typeof x === "number" && Number.isFinite(x);
const dashed = { stroke: quiet, width: 1.5, dash: "3 3" };

/** The colour ramp's place of a pull (log10 over the mean), as a CSS variable of nine. */
function tone(pull: number): string {
  const u = Math.max(0, Math.min(1, 0.56 - Math.sign(pull) * 0.37 * Math.abs(pull) ** 0.6));
  return css(`r${Math.round(8 * u)}`);
}

/** Powers of ten in a range, every other one where they would touch. */
const decades = (low: number, high: number): number[] => Array.from({ length: 9 }, (_, i) => 10 ** i).filter((d) => d >= low && d <= high && (high < 1e6 || Math.log10(d) % 2 === Math.floor(Math.log10(high)) % 2));
const points = (x: number[], y: (number | null)[]): Point[] => x.flatMap((v, i) => { const w = y[i]; return finite(w) ? [{ x: v, y: w }] : []; });

export type AxisOf = "energy" | "fitness";

interface Height { x: number; y: number; pull: number | null }

/** Area under a law in the colours of the disc: neighbours of one colour are one area, with a hair's stroke so that no seam
 * shows. */
function area(p: Plane, law: readonly Height[], top: number): void {
  let band: { x: number; low: number; high: number }[] = [];
  let fill = "";
  for (const q of law) {
    const at = { x: q.x, low: 0, high: Math.min(q.y, top) };
    const next = tone(q.pull ?? 0);
    if (next !== fill) {
      if (band.length > 0) p.area([...band, at], { fill, stroke: fill, width: 0.6 });
      band = [];
      fill = next;
    }
    band.push(at);
  }
  p.area(band, { fill, stroke: fill, width: 0.6 });
}

export interface LeaderMark { id: string; energy: number; fitness: number }

function leaderMark(p: Plane, x: number, id: string, top: number, late: boolean): void {
  p.upright(x, { stroke: ember, width: 2 });
  p.text({ x, y: top }, id, { dy: -9, fill: emberText, weight: 600, anchor: late ? "end" : "start" });
}

/** The density over energies or fitness, its area in the colours of the disc; the leader's place. */
export function density(c: Curves, leader: LeaderMark | undefined, held: Curves | undefined, axis: AxisOf, width: number): Element {
  const byFitness = axis === "fitness";
  const discrete = c.levels.length > 0;
  const heights = (of: Curves): Height[] => {
    const x = byFitness ? of.fitness : of.eps, y = byFitness ? of.fitnessDensity : of.density;
    const all = (x ?? []).flatMap((v, i) => { const w = y?.[i]; return finite(w) ? [{ x: v, y: w, pull: of.pull?.[i] ?? 0 }] : []; });
    return byFitness ? all.reverse() : all;
  };
  const law = discrete ? c.levels.map((l) => ({ x: byFitness ? l.fitness : l.eps, y: l.weight, pull: l.pull })).sort((a, b) => a.x - b.x) : heights(c);
  const low = law[0]?.x ?? 0, high = law.at(-1)?.x ?? 1;
  const middle = law[Math.floor(law.length / 2)]?.y ?? 1;
  const most = Math.max(...(discrete ? law : law.slice(1, -1)).map((p) => p.y));
  const top = 1.08 * (discrete ? most : Math.min(most, 4 * middle + 4)); // an edge that goes to infinity is cut
  const spare = discrete ? 0.04 * (high - low || 1) : 0;
  const p = new Plane({ width, height: 170, margin: { left: 8, right: 10, bottom: 38, top: 22 }, x: { domain: [Math.min(0, low) - spare, byFitness ? Math.max(1, high) + spare : (high > low ? high : low + 1) + spare], ticks: 5 }, y: { domain: [0, top], hidden: true } });
  if (discrete) {
    for (const l of law) p.upright(l.x, { stroke: tone(l.pull ?? 0), width: 6 }, [0, l.y]);
  } else {
    area(p, law, top);
    if (held && held.levels.length === 0) p.line(heights(held).map((q) => ({ x: q.x, y: Math.min(q.y, top) })).filter((q) => q.x <= high), dashed);
    p.line(law.map((q) => ({ x: q.x, y: Math.min(q.y, top) })), { stroke: ink });
  }
  const at = byFitness ? leader?.fitness : leader?.energy;
  if (leader && at !== undefined && at <= high) leaderMark(p, at, leader.id, top, at > (low + high) / 2);
  if (byFitness) p.foot("least fit", "start", quiet).foot("fitness η = exp(−βε)", "middle", quiet).foot("fittest", "end", quiet);
  else p.foot("fittest", "start", quiet).foot("energy ε", "middle", quiet).foot("least fit", "end", quiet);
  return p.axes();
}

/** What of a drawn law is on show: the largest energy, and the largest density in the user's own units. */
export interface Frame { high: number; top: number }

/** A drawn law in the user's own units, for its knots to be moved on: lines from knot to knot over the colours of the disc. */
export function drawn(knots: readonly (readonly [number, number])[], c: Curves | undefined, leader: LeaderMark | undefined, frame: Frame, width: number): Plane {
  const p = new Plane({ width, height: 190, margin: { left: 12, right: 14, bottom: 38, top: 22 }, x: { domain: [0, frame.high], ticks: 5 }, y: { domain: [0, frame.top], hidden: true } });
  // The program counts energies from the first knot that is not part of a stretch without members.
  const start = knots.findIndex((k, i) => k[1] > 0 || (knots[i + 1]?.[1] ?? 0) > 0);
  const origin = knots[start]?.[0] ?? 0;
  const height = (x: number): number => {
    const i = knots.findIndex((k) => k[0] >= x);
    const a = knots[i - 1], b = knots[i];
    return !b ? 0 : !a ? b[1] : a[1] + ((b[1] - a[1]) * (x - a[0])) / (b[0] - a[0]);
  };
  if (c?.pull) {
    const places = [...c.eps.map((e, i) => ({ x: e + origin, pull: c.pull?.[i] ?? 0 })), ...knots.map((k) => ({ x: k[0], pull: null }))].sort((a, b) => a.x - b.x);
    let pull = c.pull[0] ?? 0;
    area(p, places.filter((q) => q.x >= origin).map((q) => ({ x: q.x, y: height(q.x), pull: q.pull === null ? pull : (pull = q.pull) })), frame.top);
  }
  p.line(knots.map(([x, y]) => ({ x, y })), { stroke: ink });
  if (leader && leader.energy + origin <= frame.high) leaderMark(p, leader.energy + origin, leader.id, frame.top, leader.energy + origin > frame.high / 2);
  p.foot("fittest", "start", quiet).foot("energy ε", "middle", quiet).foot("least fit", "end", quiet);
  p.axes();
  return p;
}

const small = { width: 0, height: 132, margin: { left: 34, right: 14, bottom: 22, top: 10 } };

/** f(eps): how fast a member's tickets grow. */
export function exponent(s: Solved, g: Grown | undefined, held: Solved | undefined, width: number): Element | undefined {
  const c = s.curves;
  if (!c?.exponent?.length) return undefined;
  const f = points(c.eps, c.exponent);
  const low = f[0]?.x ?? 0, high = Math.max(f.at(-1)?.x ?? 1, low + 1e-9);
  const near = (e: number): number => f.find((q) => q.x >= e)?.y ?? f.at(-1)?.y ?? 0;
  const p = new Plane({ ...small, width, x: { domain: [Math.min(0, low), high], ticks: 3 }, y: { domain: [0, 1], ticks: [0, 0.5, 1] } });
  p.across(0.5, { stroke: line }).across(1, { stroke: line });
  if (held?.curves?.exponent) p.line(points(held.curves.eps, held.curves.exponent).filter((q) => q.x <= high), dashed);
  p.line(f, { stroke: ink });
  const ranking = g?.ranking.filter((m) => m.energy <= high) ?? [];
  [...ranking].reverse().forEach((m) => {
    const leader = m === ranking[0];
    p.dot({ x: m.energy, y: near(m.energy) }, leader ? 4.5 : 3, { fill: leader ? ember : blue });
  });
  const first = ranking[0];
  if (first) p.text({ x: first.energy, y: near(first.energy) }, first.id, { dx: 8, fill: emberText, weight: 600 });
  return p.axes();
}

/** n(eps): the Bose curve, and what was counted in this very network. */
export function occupation(s: Solved, g: Grown | undefined, held: Solved | undefined, width: number): Element | undefined {
  const c = s.curves;
  if (!c?.occupation?.length) return undefined;
  const low = 0.001, high = 1000;
  const inside = (q: Point[]): Point[] => q.filter((r) => r.y >= low).map((r) => ({ x: r.x, y: Math.min(r.y, high * 1.2) }));
  const curve = inside(points(c.eps, c.occupation));
  const from = Math.min(0, c.eps[0] ?? 0), to = Math.max(c.eps.at(-1) ?? 1, from + 1e-9);
  const p = new Plane({ ...small, margin: { ...small.margin, left: 40 }, width, x: { domain: [from, to], ticks: 3 }, y: { domain: [low, high], log: true, ticks: [0.001, 1, 1000], format: (d) => (d >= 1000 ? "1,000" : String(d)) } });
  for (const v of [0.001, 1, 1000]) p.across(v, { stroke: line });
  if (held?.curves?.occupation) p.line(inside(points(held.curves.eps, held.curves.occupation)).filter((q) => q.x <= to), dashed);
  p.line(curve, { stroke: ink });
  for (const q of (g?.counted ?? []).filter((r) => r.n >= low && r.eps <= to)) {
    p.upright(q.eps, { stroke: blue, opacity: 0.6 }, [Math.max(low, q.n - q.error), Math.min(q.n + q.error, high * 1.2)]);
    p.dot({ x: q.eps, y: Math.min(q.n, high * 1.2) }, 3.2, { stroke: blue, width: 1.6, fill: css("sheet") });
  }
  return p.axes();
}

/** beta mu over sharpness, the critical point and where we are. */
export function potential(s: Solved, sharpness: number, width: number): Element | undefined {
  const c = s.curves;
  if (!c?.beta?.length || !c.betaMuOver) return undefined;
  const low = Math.min(-1.2, Math.max(-4, c.betaMuOver[0] ?? -1));
  const now = { x: sharpness, y: Math.max(low, s.betaMu ?? 0) };
  const end = c.beta.at(-1) ?? 10;
  const p = new Plane({ ...small, width, x: { domain: [0, end], ticks: 3 }, y: { domain: [low, 0], ticks: 3 } });
  if (finite(s.criticalSharpness) && s.criticalSharpness < end) {
    p.band(s.criticalSharpness, end, { fill: css("well") }).upright(s.criticalSharpness, dashed);
    p.text({ x: s.criticalSharpness, y: low }, "critical", { dx: 5, dy: -7, fill: quiet });
  }
  p.line(points(c.beta, c.betaMuOver).map((q) => ({ x: q.x, y: Math.max(q.y, low) })), { stroke: ink });
  p.dot(now, 4.5, { fill: ink });
  p.text(now, "now", { dy: now.y > low / 3 ? 13 : -11, dx: now.x > end * 0.85 ? -8 : 0, anchor: "middle", fill: ink });
  return p.axes();
}

/** Margin gauge: sharpness on its way to the critical point and beyond. */
export function gauge(s: Solved, sharpness: number, end: number, width: number): Element | undefined {
  if (!finite(s.criticalSharpness)) return undefined;
  const p = new Plane({ width, height: 54, margin: { left: 6, right: 6, bottom: 20, top: 20 }, x: { domain: [0, end], ticks: 4 }, y: { domain: [0, 1], hidden: true } });
  p.band(s.criticalSharpness, end, { fill: css("r6"), opacity: 0.55 }, [0.2, 0.8]);
  p.across(0.5, { stroke: css("control") }).upright(s.criticalSharpness, { stroke: ink });
  p.text({ x: s.criticalSharpness, y: 1 }, `critical ${number(s.criticalSharpness)}`, { dy: -11, anchor: "middle", fill: quiet });
  p.pointer({ x: sharpness, y: 0.5 }, 5, ink);
  return p.axes();
}

/** Shares over size: the largest five, and when the lead changed. */
export function shares(g: Grown, width: number): Element {
  const { members } = g.path;
  const end = members.at(-1) ?? 1;
  const start = Math.max(2, Math.min(10, members[0] ?? 2));
  const leader = members.map((x, k) => ({ x, y: g.path.share[k]! })).filter((q) => q.x >= start);
  const top = Math.min(1, Math.max(0.02, ...leader.filter((p) => p.x >= 10 || leader.length < 20).map((p) => p.y)) * 1.08);
  const cut = (q: Point[]): Point[] => q.map((r) => ({ x: r.x, y: Math.min(r.y, top) }));
  const colour = (i: number): string => (i === 0 ? ember : css(`r${[0, 1, 3, 5, 6][i] ?? 6}`));
  const p = new Plane({ width, height: 190, margin: { left: 40, right: 58, bottom: 24, top: 20 }, x: { domain: [start, Math.max(end, start + 1)], log: true, ticks: decades(start, end), format: count }, y: { domain: [0, top], ticks: 3, format: percent } });
  p.grid(line).line(cut(leader), { stroke: quiet, width: 1.5, dash: "2 3" });
  const followed = g.path.followed.map((f) => members.map((x, k) => ({ x, y: f[k]! })).filter((q) => q.x >= start));
  followed.map((f, i) => ({ f, i })).reverse().forEach(({ f, i }) => p.line(cut(f), { stroke: colour(i), width: i === 0 ? 2.2 : 1.4 }));
  for (const r of g.reigns.slice(1)) p.upright(r.from, { stroke: ember, width: 2 }, [top * 1.01, top * 1.05]);
  let below = -Infinity; // labels keep a line apart, from the lowest up
  const labels = followed.map((f, i) => ({ y: f.at(-1)?.y ?? 0, id: g.ranking[i]?.id ?? "", i })).sort((a, b) => a.y - b.y);
  for (const l of labels) p.text({ x: end, y: (below = Math.max(l.y, below + top * 0.085)) }, l.id, { dx: 6, fill: l.i === 0 ? emberText : ink });
  return p.axes();
}

/** How many members hold at least so many links, both axes in powers of ten. */
export function degrees(g: Grown, width: number): Element | undefined {
  const p0 = points(g.tail.links, g.tail.share);
  const most = p0.at(-1)?.x ?? 1, least = Math.min(0.1, p0.at(-1)?.y ?? 0.1);
  if (p0.length < 2) return undefined;
  const low = 10 ** Math.floor(Math.log10(least));
  const p = new Plane({ ...small, height: 150, margin: { ...small.margin, left: 48 }, width, x: { domain: [1, Math.max(10, most)], log: true, ticks: decades(1, Math.max(10, most)), format: count }, y: { domain: [low, 1], log: true, ticks: [1, Math.sqrt(low) > 0 ? 10 ** Math.round(Math.log10(low) / 2) : low, low], format: percent } });
  p.grid(line);
  for (const q of p0) p.dot(q, 2.6, { stroke: blue, width: 1.4, fill: css("sheet") });
  const leader = p0.at(-1);
  if (leader) p.dot(leader, 4, { fill: ember }).text(leader, g.leader.id, { dx: -8, dy: -2, anchor: "end", fill: emberText, weight: 600 });
  return p.axes();
}

/** The levels whose links are counted over size, as the engine has them. */
export const levelNames = ["fittest 0.1 %", "fittest 1 %", "fittest 10 %", "fitter half"];

/** Who holds the links: the share of the fittest 0.1, 1, 10 and 50 % of the law, over size. */
export function levels(g: Grown, width: number): Element | undefined {
  const { members } = g.path;
  const from = members.findIndex((n) => n >= 10);
  const end = members.at(-1) ?? 10;
  if (from < 0 || g.path.levels.length === 0 || end <= 10) return undefined;
  const p = new Plane({ width, height: 170, margin: { left: 40, right: 82, bottom: 24, top: 10 }, x: { domain: [members[from] ?? 10, end], log: true, ticks: decades(members[from] ?? 10, end), format: count }, y: { domain: [0, 1], ticks: 3, format: percent } });
  let below = members.map(() => 0), label = -Infinity;
  g.path.levels.forEach((level, i) => {
    const at = members.map((x, k) => ({ x, low: below[k] ?? 0, high: level[k] ?? 0 })).slice(from);
    p.area(at, { fill: css(`r${[0, 2, 4, 6][i] ?? 6}`), opacity: 0.85 });
    below = level;
  });
  p.grid(line);
  g.path.levels.forEach((level, i) => p.text({ x: end, y: (label = Math.max(level.at(-1) ?? 0, label + 0.1)) }, (levelNames[i] ?? "").replace("fittest ", "").replace("fitter ", ""), { dx: 6, fill: ink }));
  return p.axes();
}

/** beta mu as it was counted at every size, on its way to that of endless growth. */
export function potentialOverSize(g: Grown, limit: number | null, width: number): Element | undefined {
  const path = points(g.path.members, g.path.betaMu).filter((q) => q.x >= 10);
  if (path.length < 2) return undefined;
  const end = path.at(-1)?.x ?? 10, start = Math.min(10, path[0]?.x ?? 10);
  const ys = [...path.map((q) => q.y), ...(finite(limit) ? [limit] : [])];
  const low = Math.min(0, ...ys), high = Math.max(0.05, ...ys), room = 0.08 * (high - low);
  const p = new Plane({ ...small, height: 150, margin: { ...small.margin, left: 40 }, width, x: { domain: [start, Math.max(end, start + 1)], log: true, ticks: decades(start, end), format: count }, y: { domain: [low - room, high + room], ticks: 3 } });
  p.grid(line);
  if (finite(limit)) {
    p.across(limit, { stroke: ink, dash: "4 3" });
    p.text({ x: end, y: limit }, "endless growth", { anchor: "end", dy: limit > (low + high) / 2 ? 9 : -8, fill: quiet });
  }
  p.line(path, { stroke: blue, width: 1.6 });
  return p.axes();
}

/** How the shares of an imported log went. */
export function track(t: { members: number[]; share: number[]; top4: number[] }, width: number): Element {
  const leader = t.members.map((x, i) => ({ x, y: t.share[i]! }));
  const four = t.members.map((x, i) => ({ x, y: t.top4[i]! }));
  const top = Math.min(1, Math.max(...four.map((p) => p.y)) * 1.06);
  const low = t.members[0] ?? 2, high = t.members.at(-1) ?? 10;
  const p = new Plane({ width, height: 170, margin: { left: 40, right: 62, bottom: 24, top: 10 }, x: { domain: [low, Math.max(high, low + 1)], log: true, ticks: decades(low, high), format: count }, y: { domain: [0, top], ticks: 3, format: percent } });
  p.grid(line).line(four, { stroke: blue }).line(leader, { stroke: ember, width: 2.2 });
  const a = leader.at(-1), b = four.at(-1);
  const apart = (b?.y ?? 0) - (a?.y ?? 0) < top * 0.09 ? 6 : 0; // two labels keep a line apart
  if (a) p.text(a, "leader", { dx: 6, dy: apart, fill: emberText, weight: 600 });
  if (b) p.text(b, "top four", { dx: 6, dy: -apart, fill: ink });
  return p.axes();
}

/** A share over links with its bands: 95 and 80 of 100 paths and the middle; what happened, where it is known. */
export function ahead(links: readonly number[], b: Band, truth: readonly number[] | undefined, label: string, width: number): Element {
  const first = links[0] ?? 1, end = Math.max(links.at(-1) ?? 2, first + 1);
  const top = Math.min(1, Math.max(...b.q975, ...(truth ?? [])) * 1.15);
  const p = new Plane({ width, height: 170, margin: { left: 46, right: 62, bottom: 24, top: 12 }, x: { domain: [first, end], ticks: 4, format: count }, y: { domain: [0, top], ticks: 3, format: percent } });
  p.grid(line);
  bands(p, links.map((x, i) => ({ x, low: b.q025[i]!, high: b.q975[i]!, inner: [b.q10[i]!, b.q90[i]!], y: b.q50[i]! })));
  if (truth) {
    truth.forEach((y, i) => p.dot({ x: links[i]!, y }, 3, { stroke: ink, width: 1.5, fill: css("sheet") }));
    p.text({ x: end, y: truth.at(-1) ?? 0 }, "happened", { dx: 8, fill: ink });
  } else {
    p.dot({ x: first, y: b.q50[0] ?? 0 }, 4.5, { fill: ember });
    p.text({ x: end, y: b.q50.at(-1) ?? 0 }, label, { dx: 6, fill: ink });
  }
  return p.axes();
}

function bands(p: Plane, at: { x: number; low: number; high: number; inner: number[]; y: number }[]): void {
  p.area(at.map((b) => ({ x: b.x, low: b.low, high: b.high })), { fill: css("r6"), opacity: 0.35 });
  p.area(at.map((b) => ({ x: b.x, low: b.inner[0]!, high: b.inner[1]! })), { fill: css("r5"), opacity: 0.45 });
  p.line(at.map((b) => ({ x: b.x, y: b.y })), { stroke: css("r1"), width: 2 });
}

/** The leader's share from today to the horizon: 95 and 80 of 100 runs, the middle, the limit. */
export function fan(o: Outlook, width: number): Element {
  const top = Math.min(1, Math.max(o.past.limit, ...o.bySize.map((b) => b.q975)) * 1.15);
  const p = new Plane({ width, height: 190, margin: { left: 40, right: 62, bottom: 24, top: 12 }, x: { domain: [o.members, Math.max(o.horizon, o.members + 1)], ticks: 4, format: count }, y: { domain: [0, top], ticks: 3, format: percent } });
  p.grid(line);
  bands(p, o.bySize.map((b) => ({ x: b.members, low: b.q025, high: b.q975, inner: [b.q10, b.q90], y: b.q50 })));
  if (o.past.limit > 0) {
    p.across(o.past.limit, { stroke: ink, dash: "4 3" });
    p.text({ x: o.horizon, y: o.past.limit }, `limit ${percent(o.past.limit)}`, { dx: 6, fill: ink });
  }
  p.dot({ x: o.members, y: o.today }, 4.5, { fill: ember });
  const last = o.bySize.at(-1);
  if (last && Math.abs(o.leaderShare.q50 - o.past.limit) > top * 0.07) p.text({ x: last.members, y: last.q50 }, "median", { dx: 6, fill: ink });
  return p.axes();
}
