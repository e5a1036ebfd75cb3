// A plane to draw on: two scales, axes and marks, as an SVG element. Small on purpose: a chart is drawn anew in every frame
// of a drag, and costs well under a millisecond.
import { ticks as niceTicks, tickStep } from "d3-array";

export interface Axis {
  domain: [number, number];
  log?: boolean;
  ticks?: number | number[]; // how many, or which
  format?: (v: number) => string;
  hidden?: boolean;
}

export interface PlaneOptions {
  width: number;
  height: number;
  margin: { top: number; right: number; bottom: number; left: number };
  x: Axis;
  y: Axis;
}

export interface Point { x: number; y: number }

export interface Look {
  stroke?: string;
  width?: number;
  dash?: string;
  fill?: string;
  opacity?: number;
}

export interface TextLook {
  fill?: string;
  weight?: number;
  anchor?: "start" | "middle" | "end";
  dx?: number;
  dy?: number;
}

const space = "http://www.w3.org/2000/svg";

type Attributes = Record<string, string | number | undefined>;

function element(name: string, attributes: Attributes): SVGElement {
  const e = document.createElementNS(space, name);
  for (const [k, v] of Object.entries(attributes)) if (v !== undefined) e.setAttribute(k, typeof v === "number" ? String(Math.round(v * 100) / 100) : v);
  return e;
}

/** Numbers on an axis, with the digits its step needs. */
function plain(step: number): (v: number) => string {
  const digits = Math.max(0, Math.min(12, -Math.floor(Math.log10(step) + 1e-9)));
  const f = new Intl.NumberFormat("en", { minimumFractionDigits: digits, maximumFractionDigits: digits });
  return (v) => f.format(v).replace("-", "−");
}

const formats = new Map<number, (v: number) => string>();

const planes = new WeakMap<Element, Plane>();

/** The plane a chart was drawn on. */
export const planeOf = (chart: Element | null | undefined): Plane | undefined => (chart ? planes.get(chart) : undefined);

export class Plane {
  readonly svg: SVGElement;
  private readonly left: number;
  private readonly right: number;
  private readonly top: number;
  private readonly bottom: number;

  constructor(readonly o: PlaneOptions) {
    this.left = o.margin.left;
    this.right = Math.max(this.left + 1, o.width - o.margin.right);
    this.top = o.margin.top;
    this.bottom = o.height - o.margin.bottom;
    this.svg = element("svg", { width: o.width, height: o.height, viewBox: `0 0 ${o.width} ${o.height}`, fill: "currentColor", "font-family": "inherit", "font-size": "11.5px", overflow: "visible" });
    planes.set(this.svg, this);
  }

  private place(v: number, a: Axis, from: number, to: number): number {
    const [low, high] = a.domain;
    const t = a.log ? Math.log(Math.max(v, Number.MIN_VALUE) / low) / Math.log(high / low) : (v - low) / (high - low);
    return from + Math.max(-0.5, Math.min(1.5, t)) * (to - from);
  }

  x(v: number): number { return this.place(v, this.o.x, this.left, this.right); }
  y(v: number): number { return this.place(v, this.o.y, this.bottom, this.top); }

  /** What lies at a place on the x axis. */
  valueAt(px: number): number {
    const [low, high] = this.o.x.domain;
    const t = Math.max(0, Math.min(1, (px - this.left) / (this.right - this.left)));
    return this.o.x.log ? low * (high / low) ** t : low + t * (high - low);
  }

  /** What lies at a place on the y axis. */
  heightAt(px: number): number {
    const [low, high] = this.o.y.domain;
    return low + Math.max(0, Math.min(1, (this.bottom - px) / (this.bottom - this.top))) * (high - low);
  }

  private put(name: string, attributes: Attributes): this {
    this.svg.append(element(name, attributes));
    return this;
  }

  private segment(x1: number, y1: number, x2: number, y2: number, look: Look): this {
    return this.put("line", { x1, y1, x2, y2, stroke: look.stroke ?? "currentColor", "stroke-width": look.width ?? 1, "stroke-dasharray": look.dash, "stroke-opacity": look.opacity });
  }

  line(points: readonly Point[], look: Look): this {
    if (points.length < 2) return this;
    return this.put("path", { d: this.path(points), fill: "none", stroke: look.stroke, "stroke-width": look.width ?? 1.75, "stroke-dasharray": look.dash, "stroke-linejoin": "round", "stroke-opacity": look.opacity });
  }

  private path(points: readonly Point[]): string {
    let d = "";
    for (const p of points) d += `${d ? "L" : "M"}${this.x(p.x).toFixed(1)} ${this.y(p.y).toFixed(1)}`;
    return d;
  }

  area(points: readonly { x: number; low: number; high: number }[], look: Look): this {
    if (points.length < 2) return this;
    const there = this.path(points.map((p) => ({ x: p.x, y: p.high })));
    const back = this.path([...points].reverse().map((p) => ({ x: p.x, y: p.low }))).replace("M", "L");
    return this.put("path", { d: `${there}${back}Z`, fill: look.fill, "fill-opacity": look.opacity, stroke: look.stroke, "stroke-width": look.stroke && (look.width ?? 1) });
  }

  /** A rule across the plane at y. */
  across(y: number, look: Look): this { return this.segment(this.left, this.y(y), this.right, this.y(y), look); }

  /** A rule at x, over all of the plane or between two values. */
  upright(x: number, look: Look, between?: [number, number]): this {
    const [a, b] = between ?? this.o.y.domain;
    return this.segment(this.x(x), this.y(a), this.x(x), this.y(b), look);
  }

  /** A band between two values of x, and of y if given. */
  band(x1: number, x2: number, look: Look, y: [number, number] = this.o.y.domain): this {
    const a = this.x(x1), b = this.x(x2), c = this.y(y[1]), d = this.y(y[0]);
    return this.put("rect", { x: Math.min(a, b), y: Math.min(c, d), width: Math.abs(b - a), height: Math.abs(d - c), fill: look.fill, "fill-opacity": look.opacity });
  }

  dot(p: Point, r: number, look: Look): this {
    return this.put("circle", { cx: this.x(p.x), cy: this.y(p.y), r, fill: look.fill ?? "none", stroke: look.stroke, "stroke-width": look.width });
  }

  /** A pointer standing on a place, its tip down. */
  pointer(p: Point, size: number, fill: string): this {
    const x = this.x(p.x), y = this.y(p.y);
    return this.put("path", { d: `M${x.toFixed(1)} ${(y - 2).toFixed(1)}l${-size} ${-1.7 * size}h${2 * size}Z`, fill });
  }

  text(p: Point, text: string, look: TextLook = {}): this { return this.note(this.x(p.x) + (look.dx ?? 0), this.y(p.y) + (look.dy ?? 0), text, look); }

  /** Words at the foot of the plane. */
  foot(text: string, anchor: "start" | "middle" | "end", fill: string): this {
    const x = anchor === "start" ? this.left : anchor === "end" ? this.right : (this.left + this.right) / 2;
    return this.note(x, this.o.height - 6, text, { anchor, fill });
  }

  private note(x: number, y: number, text: string, look: TextLook): this {
    const e = element("text", { x, y, dy: "0.32em", fill: look.fill, "font-weight": look.weight, "text-anchor": look.anchor ?? "start" });
    e.textContent = text;
    this.svg.append(e);
    return this;
  }

  private ticks(a: Axis): number[] {
    if (Array.isArray(a.ticks)) return a.ticks;
    return niceTicks(a.domain[0], a.domain[1], a.ticks ?? 5);
  }

  private format(a: Axis): (v: number) => string {
    if (a.format) return a.format;
    const step = Array.isArray(a.ticks) ? 0.1 : tickStep(a.domain[0], a.domain[1], a.ticks ?? 5);
    const key = Math.floor(Math.log10(step) + 1e-9);
    const known = formats.get(key) ?? plain(step);
    formats.set(key, known);
    return known;
  }

  /** Thin rules at the ticks of y. */
  grid(stroke: string): this {
    for (const v of this.ticks(this.o.y)) this.across(v, { stroke });
    return this;
  }

  /** Both axes: the line of x, ticks, numbers. */
  axes(): SVGElement {
    const { x, y } = this.o;
    if (!x.hidden) {
      this.segment(this.left, this.bottom, this.right, this.bottom, {});
      const f = this.format(x);
      for (const v of this.ticks(x)) {
        const at = this.x(v);
        this.segment(at, this.bottom, at, this.bottom + 5, {});
        this.note(at, this.bottom + 13, f(v), { anchor: "middle" });
      }
    }
    if (!y.hidden) {
      const f = this.format(y);
      for (const v of this.ticks(y)) {
        const at = this.y(v);
        this.segment(this.left - 5, at, this.left, at, {});
        this.note(this.left - 8, at, f(v), { anchor: "end" });
      }
    }
    return this.svg;
  }
}
