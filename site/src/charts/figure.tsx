// A chart with its title, its summary in words and its table.
import type { JSX } from "preact";
import { useLayoutEffect, useRef, useState } from "preact/hooks";

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

export function Figure(p: FigureProps): JSX.Element {
  const ref = useRef<HTMLDivElement>(null);
  const [width, setWidth] = useState(0);
  const [open, setOpen] = useState(false);
  const last = useRef(-Infinity);
  const [near, setNear] = useState(false); // only what is on the screen, or nearly, is drawn
  useLayoutEffect(() => {
    const el = ref.current;
    if (!el) return;
    const watch = new ResizeObserver(() => setWidth(Math.floor(el.clientWidth)));
    watch.observe(el);
    setWidth(Math.floor(el.clientWidth));
    const sight = new IntersectionObserver((seen) => setNear(seen.some((s) => s.isIntersecting)), { rootMargin: "200px" });
    sight.observe(el);
    return () => { watch.disconnect(); sight.disconnect(); };
  }, []);
  useLayoutEffect(() => {
    const el = ref.current;
    if (!el || width === 0 || !near) return;
    const draw = (): void => {
      last.current = performance.now();
      const chart = p.draw(width);
      chart?.setAttribute("aria-hidden", "true");
      if (chart) el.replaceChildren(chart);
      else el.replaceChildren();
    };
    const wait = last.current + (p.every ?? 0) - performance.now();
    if (wait <= 0) {
      draw();
      return;
    }
    const later = window.setTimeout(draw, wait);
    return () => clearTimeout(later);
  }, [width, near, ...p.of]);
  const save = (): void => {
    const chart = p.draw(width || 440)?.querySelector("svg") ?? ref.current?.querySelector("svg");
    if (!chart) return;
    const copy = chart.cloneNode(true) as SVGElement;
    copy.setAttribute("xmlns", "http://www.w3.org/2000/svg");
    download(`${p.name}.svg`, copy.outerHTML, "image/svg+xml");
  };
  const table = open ? p.table() : undefined;
  return (
    <figure class={p.class}>
      <figcaption>
        <strong>{p.title}</strong>
      </figcaption>
      <div ref={ref} class="chart" role="img" aria-label={`${p.title}. ${p.summary}`} />
      {p.note && <p class="caption">{p.note}</p>}
      <details onToggle={(e) => setOpen(e.currentTarget.open)}>
        <summary aria-label={`Table: ${p.title}`}>Table</summary>
        <p class="caption">{p.summary}</p>
        <div class="buttons">
          <button type="button" onClick={() => download(`${p.name}.csv`, csv(p.table()), "text/csv")}>Save as CSV</button>
          <button type="button" onClick={save}>Save as SVG</button>
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
