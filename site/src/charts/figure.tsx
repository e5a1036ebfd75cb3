// A chart with its title, its summary in words and its table.
import type { JSX, RefObject } from "preact";
import { useLayoutEffect, useRef, useState } from "preact/hooks";
import { planeOf } from "./plane";

export interface Table {
  columns: string[];
  rows: (string | number)[][];
}

export interface FigureProps {
  title: string;
  summary: string;
  note?: string;
  name: string; // of the file
  table: () => Table;
  draw: (width: number) => Element | undefined;
  of: readonly unknown[]; // what the chart is drawn from: it is drawn again when one of these is another
  class?: string;
  onPoint?: (x: number, phase: "begin" | "move" | "end") => void; // something is set by pointing at the chart
  every?: number; // drawn at most this often, in ms; the last state is always drawn
}

/** Joins a table as RFC 4180 has it. */
export function csv(t: Table): string {
  const cell = (v: string | number): string => (/[",\r\n]/.test(String(v)) ? `"${String(v).replaceAll('"', '""')}"` : String(v));
  return [t.columns, ...t.rows].map((r) => r.map(cell).join(",")).join("\r\n") + "\r\n";
}

export function download(name: string, data: BlobPart, type: string): void {
  const url = URL.createObjectURL(new Blob([data], { type }));
  const a = document.createElement("a");
  a.href = url;
  a.download = name;
  a.click();
  setTimeout(() => URL.revokeObjectURL(url), 10000);
}

/** A chart as a file of its own: colours and letters of the page written into it. */
function standalone(chart: Element, page: Element): { text: string; width: number; height: number } {
  const looks = getComputedStyle(page);
  const copy = chart.cloneNode(true) as SVGElement;
  copy.setAttribute("xmlns", "http://www.w3.org/2000/svg");
  copy.setAttribute("font-family", looks.fontFamily);
  copy.setAttribute("color", looks.color);
  copy.setAttribute("style", `background:${looks.getPropertyValue("--sheet").trim()}`);
  const text = copy.outerHTML.replace(/var\((--[a-z0-9-]+)\)/g, (_, name: string) => looks.getPropertyValue(name).trim());
  return { text, width: Number(copy.getAttribute("width")), height: Number(copy.getAttribute("height")) };
}

const density = 2; // of a saved PNG

async function png(f: { text: string; width: number; height: number }): Promise<Blob> {
  const image = new Image();
  image.src = `data:image/svg+xml;charset=utf-8,${encodeURIComponent(f.text)}`;
  await image.decode();
  const canvas = document.createElement("canvas");
  canvas.width = f.width * density;
  canvas.height = f.height * density;
  canvas.getContext("2d")?.drawImage(image, 0, 0, canvas.width, canvas.height);
  return new Promise((resolve, reject) => canvas.toBlob((b) => (b ? resolve(b) : reject(new Error("no picture"))), "image/png"));
}

/** A box and how wide it is, in whole pixels; 0 before it stands. */
export function useWidth(): [RefObject<HTMLDivElement | null>, number] {
  const ref = useRef<HTMLDivElement>(null);
  const [width, setWidth] = useState(0);
  useLayoutEffect(() => {
    const el = ref.current;
    if (!el) return;
    const watch = new ResizeObserver(() => setWidth(Math.floor(el.clientWidth)));
    watch.observe(el);
    setWidth(Math.floor(el.clientWidth));
    return () => watch.disconnect();
  }, []);
  return [ref, width];
}

/** Handlers for a chart on which something is set: press, drag, let go. */
function pointing(on: NonNullable<FigureProps["onPoint"]>): Record<string, (e: PointerEvent) => void> {
  const at = (e: PointerEvent): number | undefined => {
    const box = e.currentTarget as HTMLElement;
    return planeOf(box.firstElementChild)?.valueAt(e.clientX - box.getBoundingClientRect().left);
  };
  const tell = (phase: "begin" | "move" | "end") => (e: PointerEvent) => {
    const x = at(e);
    if (x === undefined || (phase === "move" && e.buttons === 0)) return;
    if (phase === "begin") (e.currentTarget as HTMLElement).setPointerCapture(e.pointerId);
    on(x, phase);
  };
  return { onPointerDown: tell("begin"), onPointerMove: tell("move"), onPointerUp: tell("end"), onPointerCancel: tell("end") };
}

export function Figure(p: FigureProps): JSX.Element {
  const [ref, width] = useWidth();
  const [open, setOpen] = useState(false);
  const last = useRef(-Infinity);
  const [near, setNear] = useState(false); // only what is on the screen, or nearly, is drawn
  useLayoutEffect(() => {
    const el = ref.current;
    if (!el) return;
    const sight = new IntersectionObserver((seen) => setNear(seen.some((s) => s.isIntersecting)), { rootMargin: "200px" });
    sight.observe(el);
    return () => sight.disconnect();
  }, []);
  useLayoutEffect(() => {
    const el = ref.current;
    if (!el || width === 0 || !near) return;
    const draw = (): void => {
      last.current = performance.now();
      const chart = p.draw(width);
      chart?.setAttribute("aria-hidden", "true");
      el.replaceChildren(...(chart ? [chart] : []));
    };
    const wait = last.current + (p.every ?? 0) - performance.now();
    if (wait <= 0) {
      draw();
      return;
    }
    const later = window.setTimeout(draw, wait);
    return () => clearTimeout(later);
  }, [width, near, ...p.of]);
  const file = (): { text: string; width: number; height: number } | undefined => {
    const chart = p.draw(width || 440);
    return chart && ref.current ? standalone(chart, ref.current) : undefined;
  };
  const saveSVG = (): void => {
    const f = file();
    if (f) download(`${p.name}.svg`, f.text, "image/svg+xml");
  };
  const savePNG = (): void => {
    const f = file();
    if (f) void png(f).then((b) => download(`${p.name}.png`, b, "image/png"));
  };
  const table = open ? p.table() : undefined;
  return (
    <figure class={p.class}>
      <figcaption>
        <strong>{p.title}</strong>
      </figcaption>
      <div ref={ref} class="chart" data-points={p.onPoint ? "" : undefined} {...(p.onPoint && pointing(p.onPoint))} role="img" aria-label={`${p.title}. ${p.summary}`} />
      {p.note && <p class="caption">{p.note}</p>}
      <details onToggle={(e) => setOpen(e.currentTarget.open)}>
        <summary aria-label={`Table: ${p.title}`}>Table</summary>
        <p class="caption">{p.summary}</p>
        <div class="buttons">
          <button type="button" onClick={() => download(`${p.name}.csv`, csv(p.table()), "text/csv")}>Save as CSV</button>
          <button type="button" onClick={saveSVG}>Save as SVG</button>
          <button type="button" onClick={savePNG}>Save as PNG</button>
        </div>
        {table && (
          <div class="scroll" tabIndex={0} role="region" aria-label={`Values of ${p.title}`}>
            <table>
              <thead><tr>{table.columns.map((c) => <th key={c} scope="col">{c}</th>)}</tr></thead>
              <tbody>{table.rows.map((r, i) => <tr key={i}>{r.map((v, k) => <td key={k}>{v}</td>)}</tr>)}</tbody>
            </table>
          </div>
        )}
      </details>
    </figure>
  );
}
