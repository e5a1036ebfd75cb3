// Charts: data in, element out. Ink is the law, ember the leader, blues its rivals, open circles what was counted.
import * as Plot from "@observablehq/plot";
import type { Curves, Grown, Outlook, Solved } from "../state/types";
import { count, number, percent } from "../words/format";

const css = (name: string): string => `var(--${name})`;
const style = { background: "none", fontFamily: "inherit", fontSize: "11.5px", color: "currentColor", overflow: "visible" };
const ember = css("ember"), ink = css("ink"), quiet = css("ink-2"), line = css("hairline"), blue = css("r3");
const finite = (x: number | null | undefined): x is number => typeof x === "number" && Number.isFinite(x);

/** The colour ramp's place of a pull (log10 over the mean), as a CSS variable of nine. */
function tone(pull: number): string {
  const u = Math.max(0, Math.min(1, 0.56 - Math.sign(pull) * 0.37 * Math.abs(pull) ** 0.6));
  return css(`r${Math.round(8 * u)}`);
}

interface Point { x: number; y: number }
/** Powers of ten in a range, every other one where they would touch. */
const decades = (low: number, high: number): number[] => Array.from({ length: 9 }, (_, i) => 10 ** i).filter((d) => d >= low && d <= high && (high < 1e6 || Math.log10(d) % 2 === Math.floor(Math.log10(high)) % 2));
const points = (x: number[], y: (number | null)[]): Point[] => x.flatMap((v, i) => { const w = y[i]; return finite(w) ? [{ x: v, y: w }] : []; });

/** p(eps), its area in the colours of the disc; the leader's place. */
export function density(c: Curves, leader: { id: string; energy: number } | undefined, held: Curves | undefined, width: number): Element {
  if (c.levels.length > 0) {
    return Plot.plot({
      width, height: 150, style, marginLeft: 8, marginRight: 8, marginBottom: 32, x: { label: null, ticks: 5, line: true }, y: { axis: null, domain: [0, Math.max(...c.levels.map((l) => l.weight)) * 1.2] },
      marks: [Plot.ruleX(c.levels, { x: "eps", y: "weight", stroke: blue, strokeWidth: 5 })],
    });
  }
  const top = Math.min(Math.max(...c.density.slice(1)), 4 * (c.density[Math.floor(c.density.length / 2)] ?? 1) + 4);
  const law = points(c.eps, c.density.map((d) => Math.min(d, top * 1.05)));
  // Neighbours of one colour are one area; areas overlap by a point, so that no seam shows.
  const bands: (Point & { fill: string; band: number })[] = [];
  law.forEach((p, i) => {
    const fill = tone(c.pull?.[i] ?? 0);
    const before = bands.at(-1);
    if (before && before.fill !== fill) bands.push({ ...p, fill: before.fill, band: before.band });
    bands.push({ ...p, fill, band: before ? before.band + (before.fill === fill ? 0 : 1) : 0 });
  });
  const low = law[0]?.x ?? 0, high = law.at(-1)?.x ?? 1;
  const leaderSide = leader && leader.energy > (low + high) / 2 ? "end" : "start";
  return Plot.plot({
    width, height: 170, style, marginLeft: 8, marginRight: 10, marginBottom: 38, marginTop: 22,
    x: { label: null, ticks: 5, line: true, domain: [Math.min(0, low), high] }, y: { axis: null, domain: [0, top * 1.08] },
    marks: [
      Plot.areaY(bands, { x: "x", y1: 0, y2: "y", z: "band", fill: "fill" }),
      held && Plot.line(points(held.eps, held.density), { x: "x", y: "y", stroke: quiet, strokeDasharray: "3 3" }),
      Plot.line(law, { x: "x", y: "y", stroke: ink, strokeWidth: 1.75, clip: true }),
      leader && leader.energy <= high ? Plot.ruleX([leader], { x: "energy", y1: 0, y2: top * 1.08, stroke: ember, strokeWidth: 2 }) : null,
      leader && leader.energy <= high ? Plot.text([leader], { x: "energy", y: top * 1.08, dy: -9, text: "id", fill: css("ember-text"), fontWeight: 600, textAnchor: leaderSide }) : null,
      Plot.text(["fittest"], { frameAnchor: "bottom-left", dy: 36, textAnchor: "start", fill: quiet }),
      Plot.text(["energy ε"], { frameAnchor: "bottom", dy: 36, fill: quiet }),
      Plot.text(["least fit"], { frameAnchor: "bottom-right", dy: 36, textAnchor: "end", fill: quiet }),
    ],
  });
}

/** f(eps): how fast a member's tickets grow. */
export function exponent(s: Solved, g: Grown | undefined, held: Solved | undefined, width: number): Element | undefined {
  const c = s.curves;
  if (!c?.exponent?.length) return undefined;
  const near = (e: number): number => {
    const i = c.eps.findIndex((x) => x >= e);
    return c.exponent?.[i < 0 ? c.eps.length - 1 : i] ?? 0;
  };
  const top = (g?.ranking ?? []).map((m, i) => ({ x: m.energy, y: near(m.energy), id: m.id, leader: i === 0 }));
  return Plot.plot({
    width, height: 132, style, marginLeft: 34, marginRight: 14, marginBottom: 22, marginTop: 10, x: { label: null, ticks: 3, line: true }, y: { label: null, domain: [0, 1], ticks: [0, 0.5, 1] },
    marks: [
      Plot.ruleY([0.5, 1], { stroke: line }),
      held?.curves?.exponent && Plot.line(points(held.curves.eps, held.curves.exponent), { x: "x", y: "y", stroke: quiet, strokeDasharray: "3 3" }),
      Plot.line(points(c.eps, c.exponent), { x: "x", y: "y", stroke: ink, strokeWidth: 1.75 }),
      Plot.dot(top, { x: "x", y: "y", r: (d: { leader: boolean }) => (d.leader ? 4.5 : 3), fill: (d: { leader: boolean }) => (d.leader ? ember : blue) }),
      Plot.text(top.slice(0, 1), { x: "x", y: "y", text: "id", dx: 8, textAnchor: "start", fill: css("ember-text"), fontWeight: 600 }),
    ],
  });
}

/** n(eps): the Bose curve, and what was counted in this very network. */
export function occupation(s: Solved, g: Grown | undefined, held: Solved | undefined, width: number): Element | undefined {
  const c = s.curves;
  if (!c?.occupation?.length) return undefined;
  const low = 0.001, high = 1000;
  const clip = (p: Point[]): Point[] => p.filter((q) => q.y >= low && q.y <= high * 10);
  const circles = (g?.counted ?? []).filter((q) => q.n >= low).map((q) => ({ ...q, lo: Math.max(low, q.n - q.error), hi: q.n + q.error }));
  return Plot.plot({
    width, height: 132, style, marginLeft: 40, marginRight: 10, marginBottom: 22, marginTop: 10, x: { label: null, ticks: 3, line: true }, y: { type: "log", label: null, domain: [low, high], ticks: [0.001, 1, 1000], tickFormat: (d: number) => (d >= 1000 ? "1,000" : String(d)), clamp: true },
    marks: [
      Plot.ruleY([0.001, 1, 1000], { stroke: line }),
      held?.curves?.occupation && Plot.line(clip(points(held.curves.eps, held.curves.occupation)), { x: "x", y: "y", stroke: quiet, strokeDasharray: "3 3" }),
      Plot.line(clip(points(c.eps, c.occupation)), { x: "x", y: "y", stroke: ink, strokeWidth: 1.75 }),
      Plot.ruleX(circles, { x: "eps", y1: "lo", y2: "hi", stroke: blue, strokeOpacity: 0.6 }),
      Plot.dot(circles, { x: "eps", y: "n", r: 3.2, stroke: blue, strokeWidth: 1.6, fill: css("sheet") }),
    ],
  });
}

/** beta mu over sharpness, the critical point and where we are. */
export function potential(s: Solved, sharpness: number, width: number): Element | undefined {
  const c = s.curves;
  if (!c?.beta?.length || !c.betaMuOver) return undefined;
  const low = Math.min(-1.2, Math.max(-4, c.betaMuOver[0] ?? -1));
  const now = { x: sharpness, y: Math.max(low, s.betaMu ?? 0) };
  const end = c.beta.at(-1) ?? 10;
  return Plot.plot({
    width, height: 132, style, marginLeft: 34, marginRight: 10, marginBottom: 22, marginTop: 10, x: { label: null, domain: [0, end], ticks: 3, line: true }, y: { label: null, domain: [low, 0], ticks: 3, clamp: true },
    marks: [
      finite(s.criticalSharpness) && s.criticalSharpness < end ? Plot.rectX([{ x1: s.criticalSharpness, x2: end }], { x1: "x1", x2: "x2", fill: css("well") }) : null,
      finite(s.criticalSharpness) && s.criticalSharpness < end ? Plot.ruleX([s.criticalSharpness], { stroke: quiet, strokeDasharray: "3 3" }) : null,
      finite(s.criticalSharpness) && s.criticalSharpness < end ? Plot.text([s.criticalSharpness], { x: (d: number) => d, y: low, dy: -7, dx: 5, text: ["critical"], textAnchor: "start", fill: quiet }) : null,
      Plot.line(points(c.beta, c.betaMuOver), { x: "x", y: "y", stroke: ink, strokeWidth: 1.75 }),
      Plot.dot([now], { x: "x", y: "y", r: 4.5, fill: ink }),
      Plot.text([now], { x: "x", y: "y", text: ["now"], dy: 12, dx: now.x > end * 0.85 ? -8 : 0, fill: ink }),
    ],
  });
}

/** Margin gauge: sharpness on its way to the critical point and beyond. */
export function gauge(s: Solved, sharpness: number, width: number): Element | undefined {
  if (!finite(s.criticalSharpness)) return undefined;
  const end = Math.max(2 * s.criticalSharpness, sharpness * 1.1);
  return Plot.plot({
    width, height: 54, style, marginLeft: 6, marginRight: 6, marginBottom: 20, marginTop: 20, x: { domain: [0, end], label: null, ticks: 4 }, y: { axis: null, domain: [0, 1] },
    marks: [
      Plot.rectX([{ a: s.criticalSharpness, b: end }], { x1: "a", x2: "b", y1: 0.2, y2: 0.8, fill: css("r6"), fillOpacity: 0.55 }),
      Plot.ruleY([0.5], { stroke: css("control") }),
      Plot.ruleX([s.criticalSharpness], { stroke: ink }),
      Plot.dot([sharpness], { x: (d: number) => d, y: 0.5, r: 5, fill: ink, symbol: "triangle2", dy: -9 }),
      Plot.text([s.criticalSharpness], { x: (d: number) => d, frameAnchor: "top", dy: -12, text: (d: number) => `critical ${number(d)}`, fill: quiet }),
    ],
  });
}

/** Shares over size: the largest five, and when the lead changed. */
export function shares(g: Grown, width: number): Element {
  const rows = g.path.followed.flatMap((f, i) => f.map((y, k) => ({ x: g.path.members[k]!, y, id: g.ranking[i]?.id ?? "", i })));
  const leader = g.path.members.map((x, k) => ({ x, y: g.path.share[k]! }));
  const end = g.path.members.at(-1) ?? 1;
  const top = Math.min(1, Math.max(0.02, ...leader.filter((p) => p.x >= 10 || leader.length < 20).map((p) => p.y)) * 1.08);
  const colour = (i: number): string => (i === 0 ? ember : css(`r${[0, 1, 3, 5, 6][i] ?? 6}`));
  let below = -Infinity; // labels keep a line apart, from the lowest up
  const labels = rows.filter((r) => r.x === end).sort((a, b) => a.y - b.y).map((r) => ({ ...r, at: (below = Math.max(r.y, below + top * 0.085)) }));
  return Plot.plot({
    width, height: 190, style, marginLeft: 40, marginRight: 58, marginBottom: 24, marginTop: 20,
    x: { type: "log", label: null, domain: [Math.max(2, Math.min(10, g.path.members[0] ?? 2)), end], ticks: decades(2, end), tickFormat: count, line: true },
    y: { label: null, domain: [0, top], ticks: 3, tickFormat: percent, clamp: true },
    marks: [
      Plot.gridY({ stroke: line, ticks: 3 }),
      Plot.line(leader, { x: "x", y: "y", stroke: quiet, strokeDasharray: "2 3" }),
      Plot.line(rows, { x: "x", y: "y", z: "i", stroke: (d: { i: number }) => colour(d.i), strokeWidth: (d: { i: number }) => (d.i === 0 ? 2.2 : 1.4), clip: true }),
      Plot.ruleX(g.reigns.slice(1), { x: "from", y1: top, y2: top * 0.96, stroke: ember, strokeWidth: 2, dy: -5, clip: false }),
      Plot.text(labels, { x: "x", y: "at", text: "id", dx: 6, textAnchor: "start", fill: (d: { i: number }) => (d.i === 0 ? css("ember-text") : ink) }),
    ],
  });
}

/** How the shares of an imported log went. */
export function track(t: { members: number[]; share: number[]; top4: number[] }, width: number): Element {
  const leader = t.members.map((x, i) => ({ x, y: t.share[i]! }));
  const four = t.members.map((x, i) => ({ x, y: t.top4[i]! }));
  const top = Math.min(1, Math.max(...four.map((p) => p.y)) * 1.06);
  const end = leader.at(-1);
  const last = four.at(-1);
  return Plot.plot({
    width, height: 170, style, marginLeft: 40, marginRight: 62, marginBottom: 24, marginTop: 10, x: { type: "log", label: null, ticks: decades(t.members[0] ?? 2, t.members.at(-1) ?? 10), tickFormat: count, line: true },
    y: { label: null, domain: [0, top], ticks: 3, tickFormat: percent, clamp: true },
    marks: [
      Plot.gridY({ stroke: line, ticks: 3 }),
      Plot.line(four, { x: "x", y: "y", stroke: blue, clip: true }),
      Plot.line(leader, { x: "x", y: "y", stroke: ember, strokeWidth: 2.2, clip: true }),
      end && Plot.text([end], { x: "x", y: "y", text: ["leader"], dx: 6, textAnchor: "start", fill: css("ember-text"), fontWeight: 600 }),
      last && Plot.text([last], { x: "x", y: "y", text: ["top four"], dx: 6, textAnchor: "start", fill: ink }),
    ],
  });
}

/** The leader's share from today to the horizon: 95 and 80 of 100 runs, the middle, the limit. */
export function fan(o: Outlook, width: number): Element {
  const top = Math.min(1, Math.max(o.past.limit, ...o.bySize.map((b) => b.q975)) * 1.15);
  return Plot.plot({
    width, height: 190, style, marginLeft: 40, marginRight: 62, marginBottom: 24, marginTop: 12,
    x: { label: null, domain: [o.members, o.horizon], ticks: 4, tickFormat: count, line: true }, y: { label: null, domain: [0, top], ticks: 3, tickFormat: percent },
    marks: [
      Plot.gridY({ stroke: line, ticks: 3 }),
      Plot.areaY(o.bySize, { x: "members", y1: "q025", y2: "q975", fill: css("r6"), fillOpacity: 0.35 }),
      Plot.areaY(o.bySize, { x: "members", y1: "q10", y2: "q90", fill: css("r5"), fillOpacity: 0.45 }),
      Plot.line(o.bySize, { x: "members", y: "q50", stroke: css("r1"), strokeWidth: 2 }),
      o.past.limit > 0 ? Plot.ruleY([o.past.limit], { stroke: ink, strokeDasharray: "4 3" }) : null,
      o.past.limit > 0 ? Plot.text([o.past.limit], { x: o.horizon, y: (d: number) => d, text: (d: number) => `limit ${percent(d)}`, dx: 6, textAnchor: "start", fill: ink }) : null,
      Plot.dot([{ x: o.members, y: o.today }], { x: "x", y: "y", r: 4.5, fill: ember }),
      ...(Math.abs(o.leaderShare.q50 - o.past.limit) > top * 0.07 ? [Plot.text([o.bySize.at(-1)], { x: "members", y: "q50", text: ["median"], dx: 6, textAnchor: "start", fill: ink })] : []),
    ],
  });
}
