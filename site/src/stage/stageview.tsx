// The right side: the standing in one line, the disc with its labels, the transport.
import type { JSX } from "preact";
import { effect, signal } from "@preact/signals";
import { useEffect, useRef } from "preact/hooks";
import { Stage, type StageSettings } from "../engine/stage";
import { column } from "../engine/wire";
import { current, doc } from "../state/document";
import { network, paintFor } from "../state/edges";
import { engines, grown, sentenceOf, solved } from "../state/results";
import type { MemberReport } from "../state/types";
import { arrival, follow, hover, memberReport, playing, projector, quick, said, shown, speed, stageFault, still, theme, zoom } from "../state/view";
import { count, number, percent } from "../words/format";

export interface StageSource {
  script: string;
  module: () => Promise<WebAssembly.Module>;
}

let stage: Stage | undefined;
/** The stage shows its own picture. */
const drawn = signal(false);

const settings = (): StageSettings => ({
  members: Math.round(shown.value), arrival: arrival.value, theme: theme.value, zoom: zoom.value.zoom, panX: zoom.value.x, panY: zoom.value.y,
  ceiling: current.value?.entry.growth.ceiling ?? 0, follow: follow.value, hover: hover.value, quick: quick.value, playing: playing.value, still: still.value, small: innerWidth < 600, label: projector.value ? 1.65 : 1,
});

/** The present view, for an engine to paint while something is dragged. */
function paintedView(): Record<string, unknown> | undefined {
  const g = grown.peek()?.value;
  if (!stage || !drawn.peek() || !g) return undefined;
  const s = settings();
  return { ...stage.size(), members: s.members >= g.members ? 0 : s.members, arrival: s.arrival ? 1 : 0, theme: s.theme, zoom: s.zoom, panX: s.panX, panY: s.panY, ceiling: s.ceiling, following: s.follow, label: s.label };
}

export const nameOf = (member: number): string => grown.value?.value.ranking.find((r) => r.member === member)?.id ?? `M${member}`;

/** The network without a stage: a picture painted by the engine, put on a canvas. */
function stillPicture(canvas: HTMLCanvasElement, painted: () => void): () => void {
  return effect(() => {
    const s = settings();
    if (!network.value) return;
    const scale = Math.min(2, devicePixelRatio);
    const width = Math.round(canvas.clientWidth * scale), height = Math.round(canvas.clientHeight * scale);
    if (width < 2 || height < 2) return;
    void engines.main.askNewest("picture", { width, height, scale, members: s.members, arrival: s.arrival ? 1 : 0, theme: s.theme, ceiling: s.ceiling, strokes: 4000, following: s.follow, zoom: s.zoom }).then((r) => {
      const rgba = r && column<Uint8Array<ArrayBuffer>>(r, "rgba");
      if (!rgba) return;
      canvas.width = width;
      canvas.height = height;
      canvas.getContext("2d")?.putImageData(new ImageData(new Uint8ClampedArray(rgba), width, height), 0, 0);
      painted();
    }, (e: unknown) => { stageFault.value = sentenceOf(e); });
  });
}

/** The first picture comes from the engine, so that something is seen while the stage starts; where the stage cannot run,
 * every picture does. */
function useStage(source: StageSource): { host: { current: HTMLDivElement | null }; canvas: { current: HTMLCanvasElement | null } } {
  const host = useRef<HTMLDivElement>(null), canvas = useRef<HTMLCanvasElement>(null);
  useEffect(() => {
    const stops: (() => void)[] = [];
    let stop = (): void => {};
    const begin = (): void => {
      if (stage) return;
      stage = new Stage(host.current!, source.script, source.module, {
        said: (s) => {
          if (!said.peek()) {
            stop();
            drawn.value = true;
          }
          said.value = s;
        },
        ready: () => (stageFault.value = undefined),
        lost: (sentence) => {
          stageFault.value = sentence;
          paintFor(() => undefined);
          drawn.value = false;
          stop();
          stop = stillPicture(canvas.current!, () => {});
        },
      });
      paintFor(paintedView);
      stops.push(effect(() => { if (network.value) stage?.load(network.value); }), effect(() => stage?.set(settings())));
    };
    stop = stillPicture(canvas.current!, () => setTimeout(begin, 60));
    return () => { stop(); stops.forEach((f) => f()); };
  }, []);
  return { host, canvas };
}

/** Input on the disc: hover, follow, zoom, pan. The stage itself takes none. */
function Overlay(): JSX.Element {
  const drag = useRef<{ x: number; y: number; moved: boolean } | undefined>(undefined);
  const waiting = useRef(0);
  const at = (e: PointerEvent | WheelEvent | MouseEvent): [number, number] => {
    const box = (e.currentTarget as HTMLElement).getBoundingClientRect();
    return [e.clientX - box.left, e.clientY - box.top];
  };
  const zoomBy = (f: number): void => {
    const z = zoom.peek();
    const next = Math.max(1, Math.min(24, z.zoom * f));
    zoom.value = next === 1 ? { zoom: 1, x: 0, y: 0 } : { ...z, zoom: next };
  };
  const walk = (by: number): void => {
    const top = grown.peek()?.value.ranking ?? [];
    if (top.length === 0) return;
    const i = top.findIndex((r) => r.member === follow.peek());
    follow.value = top[(i + by + top.length + (i < 0 && by < 0 ? 1 : 0)) % top.length]!.member;
  };
  return (
    <div
      class="overlay" tabIndex={0} role="application" aria-label="Picture of the network. Arrow keys follow the largest members, plus and minus zoom, 0 resets, Escape lets go."
      onPointerMove={(e) => {
        if (drag.current && e.buttons) {
          const z = zoom.peek(), r = said.peek()?.r ?? 300;
          const dx = e.clientX - drag.current.x, dy = e.clientY - drag.current.y;
          if (Math.abs(dx) + Math.abs(dy) > 4 || drag.current.moved) {
            drag.current = { x: e.clientX, y: e.clientY, moved: true };
            if (z.zoom > 1) zoom.value = { ...z, x: z.x + dx / r, y: z.y + dy / r };
          }
          return;
        }
        const [x, y] = at(e);
        cancelAnimationFrame(waiting.current);
        waiting.current = requestAnimationFrame(() => (hover.value = stage?.pick(x, y) ?? -1));
      }}
      onPointerLeave={() => { cancelAnimationFrame(waiting.current); hover.value = -1; }}
      onPointerDown={(e) => { drag.current = { x: e.clientX, y: e.clientY, moved: false }; }}
      onPointerUp={(e) => {
        const moved = drag.current?.moved;
        drag.current = undefined;
        if (moved) return;
        const hit = stage?.pick(...at(e)) ?? -1;
        if (e.pointerType === "touch" && hover.peek() !== hit) hover.value = hit;
        else follow.value = hit === follow.peek() ? -1 : hit;
      }}
      onDblClick={() => (zoom.value = { zoom: 1, x: 0, y: 0 })}
      onWheel={(e) => {
        if (!e.ctrlKey && !e.metaKey && zoom.peek().zoom === 1 && e.deltaY > 0) return; // the page scrolls
        e.preventDefault();
        zoomBy(Math.exp(-e.deltaY / 400));
      }}
      onKeyDown={(e) => {
        const acts: Record<string, () => void> = {
          ArrowRight: () => walk(1), ArrowDown: () => walk(1), ArrowLeft: () => walk(-1), ArrowUp: () => walk(-1), "+": () => zoomBy(1.4), "=": () => zoomBy(1.4), "-": () => zoomBy(1 / 1.4),
          "0": () => (zoom.value = { zoom: 1, x: 0, y: 0 }), Escape: () => { follow.value = -1; hover.value = -1; },
        };
        const act = acts[e.key];
        if (!act || (e.key === "Escape" && follow.peek() < 0)) return;
        e.preventDefault();
        e.stopPropagation();
        act();
      }}
    />
  );
}

/** The member under the pointer, or the one that is followed. */
function MemberCard(): JSX.Element | null {
  const member = hover.value >= 0 ? hover.value : follow.value;
  const size = Math.round(shown.value);
  useEffect(() => {
    if (member < 0 || member >= size) {
      memberReport.value = undefined;
      return;
    }
    void engines.main.askNewest<MemberReport>("member", { member, size }).then((r) => { if (r) memberReport.value = { member, report: r.body }; }, () => {});
  }, [member, size, grown.value]);
  const m = memberReport.value;
  const s = said.value;
  if (!m || m.member !== member || !s) return null;
  const place = stage?.place(member);
  if (!place || Number.isNaN(place[0])) return null;
  const leader = s.leader;
  const right = leader ? place[0] >= leader.x : true;
  const r = m.report;
  const rows: [string, string][] = [
    ["links in", `${count(r.links)}, ${percent(r.share)}`], ["rank", `${count(r.rank)} of ${count(r.of)}`], ["energy", number(r.energy)], ["fittest within", percent(r.within)], ["pull", `× ${number(r.pull)}`],
    ["chose", r.chose.length === 0 ? "nobody" : r.chose.slice(0, 4).map(nameOf).join(", ") + (r.chose.length > 4 ? "…" : "")],
  ];
  return (
    <div class="card" role="status" style={{ left: `${place[0] + (right ? place[2] + 14 : -place[2] - 230)}px`, top: `${Math.max(4, place[1] - 90)}px` }}>
      <strong>{nameOf(member)}</strong>
      <dl>{rows.map(([k, v]) => <div key={k}><dt>{k}</dt><dd>{v}</dd></div>)}</dl>
    </div>
  );
}

const ringNames = ["", "0.1 %", "1 %", "10 %", "half"];

function Labels(): JSX.Element | null {
  const s = said.value;
  if (!s) return null;
  const { leader, label } = s;
  const zoomed = zoom.value.zoom > 1;
  const marks = [...s.rings.map((r, i) => ({ r, name: ringNames[i] ?? "" })), { r: s.r, name: "all" }];
  let least = Infinity;
  const texts = [...marks].reverse().filter((m) => { const ok = m.name !== "" && least - m.r > (projector.value ? 62 : 34); if (ok || m.name === "all") least = m.r; return ok || m.name === "all"; });
  return (
    <div class="labels" aria-hidden="true">
      {leader && label && label.x > 0 && label.y > 0 && (zoom.value.zoom === 1 || Math.hypot(leader.x - label.x, leader.y - label.y) < 260 + leader.r) && <div class="plate" style={{ left: `${label.x}px`, top: `${label.y}px` }}><b>{nameOf(leader.member)}</b> {percent(leader.share)} of links</div>}
      {!zoomed && (
        <div class="ruler" style={{ left: `${s.cx}px`, top: `${s.cy + s.r + 12}px`, width: `${s.r}px` }}>
          <i>{arrival.value ? "first to arrive" : "fittest"}</i>
          {marks.map((m) => <span key={m.r} class="tick" style={{ left: `${m.r}px` }} />)}
          {texts.map((m) => <span key={m.name} class="name" style={{ left: `${m.r}px` }}>{m.name}</span>)}
        </div>
      )}
    </div>
  );
}

function Legend(): JSX.Element | null {
  const s = said.value;
  if (!s || projector.value) return null;
  const size = (share: number): number => (s.r / zoom.value.zoom) * Math.sqrt(0.03 * share) * Math.sqrt(zoom.value.zoom);
  return (
    <>
      <div class="legend sizes" aria-hidden="true">
        <div>{[0.25, 0.05, 0.01].map((x) => <span key={x}><small>{percent(x)}</small><i style={{ width: `${2 * size(x)}px`, height: `${2 * size(x)}px` }} /></span>)}</div>
        <p>{(grown.value?.value.from ?? 1) >= s.members ? "spokes: links held in the log; who gave them is not kept" : `one stroke for ${s.oneStrokeFor < 1.5 ? "each link" : `${count(s.oneStrokeFor)} links`}`}</p>
      </div>
      <div class="legend pull" aria-hidden="true">
        <p>pull on newcomers</p>
        <div><i /><span style={{ top: "0%" }}>× 100</span><span style={{ top: "20%" }}>× 10</span><span style={{ top: "57%" }}>average</span><span style={{ top: "93%" }}>÷ 10</span></div>
      </div>
    </>
  );
}

function Readout(): JSX.Element | null {
  const s = said.value;
  const g = grown.value?.value;
  if (!s || !g) return null;
  const capped = s.capped.length > 0;
  const reigns = g.reigns.filter((r) => r.from <= s.members);
  const last = reigns.at(-1);
  return (
    <dl class="readout" aria-live="off" data-over={zoom.value.zoom > 1 ? "" : undefined}>
      {capped ? <div class="lead"><dt>At the ceiling</dt><dd>{s.capped.slice(0, 3).map(nameOf).join(", ")} {s.capped.length === 1 && s.leader ? percent(s.leader.share) : ""}</dd></div>
        : s.leader && <div class="lead"><dt>Leader</dt><dd>{nameOf(s.leader.member)} {percent(s.leader.share)}</dd></div>}
      {s.next && <div><dt>Runner-up</dt><dd>{nameOf(s.next.member)} {percent(s.next.share)}</dd></div>}
      <div><dt>Members</dt><dd>{count(s.members)}</dd></div>
      <div class="changes"><dt>Lead changes</dt><dd>{Math.max(0, reigns.length - 1)}{last && reigns.length > 1 && <small>last at {count(last.from)} members</small>}</dd></div>
    </dl>
  );
}

let clock = 0;
function play(): void {
  const g = grown.peek()?.value;
  if (!g) return;
  if (playing.peek()) {
    playing.value = false;
    return;
  }
  if (shown.peek() >= g.members) shown.value = Math.max(g.from, Math.min(10, g.members));
  playing.value = true;
  quick.value = true;
  let last = performance.now();
  let exact = shown.peek();
  const tick = (now: number): void => {
    const end = grown.peek()?.value.members ?? 0;
    if (!playing.peek()) {
      quick.value = false;
      return;
    }
    const dt = Math.min(0.2, (now - last) / 1000);
    last = now;
    exact = Math.min(end, Math.max(exact + dt * 3, exact * 10 ** ((dt * speed.peek()) / 5)));
    shown.value = Math.floor(exact);
    if (exact >= end) {
      playing.value = false;
      quick.value = false;
      return;
    }
    clock = requestAnimationFrame(tick);
  };
  cancelAnimationFrame(clock);
  clock = requestAnimationFrame(tick);
}

const notches = 1000;

const Icon = (p: { d: string }): JSX.Element => <svg viewBox="0 0 16 16" width="16" height="16" aria-hidden="true"><path d={p.d} fill="currentColor" /></svg>;
const shapes = { start: "M2 3h2v10H2zM13 3v10L5 8z", end: "M12 3h2v10h-2zM3 3v10l8-5z", play: "M4 2.5v11L13 8z", pause: "M3 3h3.5v10H3zM9.5 3H13v10H9.5z" };

function Transport(): JSX.Element | null {
  const g = grown.value?.value;
  const low = Math.max(2, g ? (g.from > 1 ? g.from : Math.min(10, g.members)) : 10);
  const high = Math.max(low + 1, g?.members ?? 100);
  const to = (n: number): number => Math.round((notches * Math.log(Math.max(low, n) / low)) / Math.log(high / low));
  const from = (k: number): number => Math.round(low * (high / low) ** (k / notches));
  const reigns = (g?.reigns ?? []).map((r, i, all) => ({ ...r, a: to(r.from), b: to(all[i + 1]?.from ?? high), last: i === all.length - 1 })).filter((r) => r.b > r.a);
  const decades: number[] = [];
  for (let d = 10; d <= high; d *= 10) if (d >= low) decades.push(d);
  const at = Math.min(high, Math.max(low, Math.round(shown.value)));
  const whole = !g || g.members <= g.from; // a network as the log left it: nothing has grown yet
  const lever = current.value?.entry.growth.leversFrom ?? 0;
  return (
    <div class="transport">
      <div class="buttons">
        <button type="button" class="icon" aria-label="To the beginning" disabled={whole} onClick={() => { playing.value = false; shown.value = low; }}><Icon d={shapes.start} /></button>
        <button type="button" class="primary" disabled={whole} onClick={play} aria-pressed={playing.value}><Icon d={playing.value ? shapes.pause : shapes.play} /> {playing.value ? "Pause" : "Play"}</button>
        <button type="button" class="icon" aria-label="To the end" disabled={whole} onClick={() => { playing.value = false; shown.value = high; }}><Icon d={shapes.end} /></button>
      </div>
      <div class="scrubber">
        <div class="reigns" aria-hidden="true">
          {reigns.map((r, i) => (
            <span key={r.from} class={r.last ? "now" : undefined} data-odd={i % 2 === 1 ? "" : undefined} style={{ left: `${r.a / 10}%`, width: `${(r.b - r.a) / 10}%` }}>{r.b - r.a > 70 && <em>{nameOf(r.leader)}</em>}</span>
          ))}
          {lever > low && lever < high && <b class="flag" style={{ left: `${to(lever) / 10}%` }} title={`Levers from ${count(lever)} members`} />}
        </div>
        <input type="range" min={0} max={notches} value={whole ? notches : to(at)} disabled={whole} aria-label="Members on show" aria-valuetext={`${count(at)} members`}
          onInput={(e) => { playing.value = false; shown.value = from(Number(e.currentTarget.value)); }}
          onPointerDown={() => (quick.value = true)} onPointerUp={() => (quick.value = false)} />
        <div class="decades" aria-hidden="true">{decades.map((d) => <span key={d} style={{ left: `${to(d) / 10}%` }}>{count(d)}</span>)}</div>
      </div>
      <label class="speed">Speed <select value={speed.value} onChange={(e) => (speed.value = Number(e.currentTarget.value))}><option value={0.5}>× ½</option><option value={1}>× 1</option><option value={2}>× 2</option><option value={4}>× 4</option></select></label>
    </div>
  );
}

function LeverTag(): JSX.Element | null {
  const g = current.value?.entry.growth;
  if (!g) return null;
  const on = [g.ceiling > 0 && `Ceiling ${percent(g.ceiling)}`, g.headStart > 0 && `Head start ${number(g.headStart)}`, g.openShare > 0 && `Open share ${percent(g.openShare)}`, g.distinct && "Distinct partners"].filter(Boolean);
  return on.length > 0 ? <p class="tag">{on.join(", ")}{g.leversFrom > 0 ? ` from ${count(g.leversFrom)} members` : ""}</p> : null;
}

export function StageView(p: { source: StageSource }): JSX.Element {
  const { host, canvas } = useStage(p.source);
  const s = solved.value?.value;
  // Beside a log the picture says of what it is, unless it grows from that log.
  const apart = Boolean(doc.value?.book.evidence) && current.value?.entry.growth.start !== "evidence";
  return (
    <div class="stage" id="stage">
      <header>
        <div>
          {(projector.value || apart) && <p class="case">{current.value?.entry.title}</p>}
          <h2>{s?.verdict.heading ?? "Preponder"}</h2>
          <p class="line">{s?.verdict.line}</p>
        </div>
        <div class="switch" role="group" aria-label="Arrangement">
          <button type="button" aria-pressed={!arrival.value} onClick={() => (arrival.value = false)}>By level</button>
          <button type="button" aria-pressed={arrival.value} onClick={() => (arrival.value = true)}>By arrival</button>
        </div>
      </header>
      <LeverTag />
      <Readout />
      <div class="picture">
        <div class="host" ref={host} />
        <canvas class="host" hidden={drawn.value} ref={canvas} aria-hidden="true" />
        <Labels />
        <Overlay />
        <MemberCard />
        {stageFault.value && <p class="notice" role="status">{stageFault.value} <button type="button" onClick={() => location.reload()}>Try again</button></p>}
      </div>
      <Legend />
      <Transport />
    </div>
  );
}
