// A drawn law: knots moved, added and taken away on its chart, by pointer and by keys, or typed as numbers.
import type { JSX } from "preact";
import { useLayoutEffect, useState } from "preact/hooks";
import { useWidth } from "../charts/figure";
import { drawn, type Frame, type LeaderMark } from "../charts/charts";
import { NumberCell } from "../controls/controls";
import type { Curves } from "../state/types";
import { number } from "../words/format";

type Knot = readonly [number, number];

export interface KnotsProps {
  knots: readonly Knot[];
  most: number;
  curves: Curves | undefined;
  leader: LeaderMark | undefined;
  onBegin: () => void;
  onEnd: () => void;
  onChange: (knots: [number, number][]) => void;
}

const short = (v: number): number => Number(v.toPrecision(4));
/** Knots keep this share of the chart's width apart. */
const gap = 1 / 400;

/** Room to the right of the last knot and above the highest, so that both can be dragged there. */
function frameOf(knots: readonly Knot[]): Frame {
  const last = knots.at(-1)?.[0] ?? 1;
  return { high: last * 1.12 || 1, top: Math.max(1e-12, ...knots.map((k) => k[1])) * 1.25 };
}

export function Knots(p: KnotsProps): JSX.Element {
  const [chart, width] = useWidth();
  const [held, setHeld] = useState<{ index: number; frame: Frame } | undefined>(undefined);
  // Knots are shown from the first on: energies count from there.
  const origin = p.knots[0]?.[0] ?? 0;
  const knots: Knot[] = p.knots.map(([e, d]) => [e - origin, d]);
  const frame = held?.frame ?? frameOf(knots);
  const plane = width > 0 ? drawn(knots, p.curves, p.leader, frame, width) : undefined;
  useLayoutEffect(() => {
    if (!plane) return;
    plane.svg.setAttribute("aria-hidden", "true");
    chart.current?.replaceChildren(plane.svg);
  });

  const send = (next: Knot[]): void => p.onChange(next.map(([e, d]) => [short(e), short(d)]));
  const change = (next: Knot[]): void => { p.onBegin(); send(next); p.onEnd(); };
  /** A knot stays between its neighbours, the first at energy 0, and at least one above density 0. */
  const moved = (i: number, e: number, d: number, f: Frame): Knot[] => {
    const least = f.high * gap;
    const from = i === 0 ? 0 : (knots[i - 1]?.[0] ?? 0) + least;
    const to = i === 0 ? 0 : i === knots.length - 1 ? Math.max(f.high, e) : (knots[i + 1]?.[0] ?? f.high) - least;
    const others = knots.some((k, j) => j !== i && k[1] > 0);
    return knots.map((k, j) => (j === i ? [Math.max(from, Math.min(to, e)), Math.max(others ? 0 : f.top / 100, d)] : k));
  };
  const removable = (i: number): boolean => knots.length > 2 && i > 0 && knots.some((k, j) => j !== i && k[1] > 0);
  const remove = (i: number): void => { if (removable(i)) change(knots.filter((_, j) => j !== i)); };
  const full = knots.length >= p.most;
  const add = (e: number, d: number): void => {
    const least = frame.high * gap;
    if (full || e < least || knots.some((k) => Math.abs(k[0] - e) < least)) return;
    change([...knots, [e, d] as Knot].sort((a, b) => a[0] - b[0]));
  };
  const addAfter = (i: number): void => {
    const a = knots[i], b = knots[i + 1] ?? knots[i];
    if (!a || !b) return;
    if (a === b) add(a[0] + frame.high * 0.06, a[1] / 2);
    else add((a[0] + b[0]) / 2, (a[1] + b[1]) / 2);
  };
  /** Where a pointer is, in energy and density. */
  const at = (e: MouseEvent): Knot | undefined => {
    const box = chart.current?.getBoundingClientRect();
    return box && plane ? [plane.valueAt(e.clientX - box.left), plane.heightAt(e.clientY - box.top)] : undefined;
  };
  const press = (e: KeyboardEvent, i: number): void => {
    const k = knots[i];
    if (!k) return;
    const far = e.shiftKey ? 10 : 1;
    const acts: Record<string, () => void> = {
      ArrowLeft: () => change(moved(i, k[0] - (far * frame.high) / 200, k[1], frame)), ArrowRight: () => change(moved(i, k[0] + (far * frame.high) / 200, k[1], frame)),
      ArrowDown: () => change(moved(i, k[0], k[1] - (far * frame.top) / 100, frame)), ArrowUp: () => change(moved(i, k[0], k[1] + (far * frame.top) / 100, frame)),
      Delete: () => remove(i), Backspace: () => remove(i), "+": () => addAfter(i), Insert: () => addAfter(i),
    };
    const act = acts[e.key];
    if (!act) return;
    e.preventDefault();
    act();
  };
  const handles = plane && knots.map(([e, d], i) => (
    <g
      key={i} tabindex={0} role="slider" aria-valuenow={short(e)} aria-valuemin={0} aria-valuemax={short(frame.high)} aria-valuetext={`energy ${number(e)}, density ${number(d)}`}
      aria-label={`Knot ${i + 1} of ${knots.length}. Arrow keys move it, plus adds one after it${removable(i) ? ", Delete takes it away" : ""}.`}
      onKeyDown={(ev) => press(ev, i)} onDblClick={(ev) => { ev.stopPropagation(); remove(i); }} onClick={(ev) => ev.stopPropagation()}
      onPointerDown={(ev) => { ev.stopPropagation(); ev.currentTarget.setPointerCapture(ev.pointerId); setHeld({ index: i, frame }); p.onBegin(); }}
      onPointerMove={(ev) => {
        if (held?.index !== i) return;
        const to = at(ev);
        if (to) send(moved(i, to[0], to[1], held.frame));
      }}
      onPointerUp={() => { if (held) { setHeld(undefined); p.onEnd(); } }} onPointerCancel={() => { if (held) { setHeld(undefined); p.onEnd(); } }}
    >
      <circle class="reach" cx={plane.x(e)} cy={plane.y(d)} r={16} />
      <circle class="knot" cx={plane.x(e)} cy={plane.y(d)} r={6} />
    </g>
  ));
  return (
    <div class="knots">
      <div class="canvas">
        <div class="chart" ref={chart} />
        <svg width={width} height={190} role="group" aria-label="Knots of the drawn law" onClick={(e) => { const k = at(e); if (k && k[0] < frame.high) add(k[0], k[1]); }}>{handles}</svg>
      </div>
      <p class="caption">Drag a knot; click beside the knots to add one; double click takes one away. {full && `${p.most} knots are the most.`}</p>
      <details>
        <summary>Knots as numbers</summary>
        <div class="scroll" tabIndex={0} role="region" aria-label="Knots as numbers">
          <table class="cells">
            <thead><tr><th scope="col">energy</th><th scope="col">density</th><th scope="col"><span class="unseen">Change</span></th></tr></thead>
            <tbody>
              {knots.map(([e, d], i) => {
                const from = knots[i - 1]?.[0] ?? 0, to = knots[i + 1]?.[0] ?? 1e6;
                return (
                  <tr key={i}>
                    <td>{i === 0 ? "0" : <NumberCell label={`Energy of knot ${i + 1}`} value={e} low={from} high={to} strict onChange={(v) => change(knots.map((k, j) => (j === i ? [v, k[1]] : k)))} />}</td>
                    <td><NumberCell label={`Density of knot ${i + 1}`} value={d} low={0} high={1e12} onChange={(v) => (v > 0 || knots.some((k, j) => j !== i && k[1] > 0)) && change(knots.map((k, j) => (j === i ? [k[0], v] : k)))} /></td>
                    <td><button type="button" disabled={full} aria-label={`Add a knot after knot ${i + 1}`} onClick={() => addAfter(i)}>+</button> <button type="button" disabled={!removable(i)} aria-label={`Take knot ${i + 1} away`} onClick={() => remove(i)}>×</button></td>
                  </tr>
                );
              })}
            </tbody>
          </table>
        </div>
      </details>
    </div>
  );
}
