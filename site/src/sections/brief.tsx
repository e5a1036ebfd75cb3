// The brief: what is printed, and its place among the sections.
import { signal } from "@preact/signals";
import type { JSX } from "preact";
import { ahead, fan, shares, track } from "../charts/charts";
import { useLayoutEffect, useRef } from "preact/hooks";
import { Check } from "../controls/controls";
import { current, doc, tables } from "../state/document";
import { grown, reached, solved } from "../state/results";
import { addressWith, fromFile } from "../state/storage";
import type { Entry, Evidence, Law } from "../state/types";
import { count, number, percent, range } from "../words/format";
import { evidenceWords, Origin, otherwise } from "./evidence";
import { Section } from "./section";
import { outlookOf } from "./sections";

export const preparedFor = signal("");
/** Where a log does not follow the plain rule, whether the brief is of the log. */
export const briefOfLog = signal(true);
/** The picture for paper, as a data address, and the code of the casebook. */
export const briefPicture = signal<string | undefined>(undefined);
export const briefCode = signal<string | undefined>(undefined);

/** A longer code is not printed. */
const longest = 3200;

export function Brief(): JSX.Element {
  const ev = doc.value?.book.evidence;
  return (
    <Section id="brief" title="Brief" aside={<button type="button" onClick={() => window.print()}>Print</button>}>
      <p class="says">One page on paper: picture, verdict, figures, what is assumed, the caution and the code that reopens this casebook. Print to PDF to hand it round.</p>
      <label class="field">Prepared for <input type="text" value={preparedFor.value} onInput={(e) => (preparedFor.value = e.currentTarget.value)} maxLength={200} /></label>
      {ev && otherwise(ev) && <Check label="Brief of the log" help="off: of this entry, with the log as a part of it" value={briefOfLog.value} onChange={(v) => (briefOfLog.value = v)} />}
    </Section>
  );
}

function Drawn(p: { draw: (width: number) => Element | undefined; of: unknown }): JSX.Element {
  const ref = useRef<HTMLDivElement>(null);
  useLayoutEffect(() => {
    const chart = p.draw(330);
    if (chart) ref.current?.replaceChildren(chart);
  }, [p.of]);
  return <div ref={ref} aria-hidden="true" />;
}

/** A law in words; long lists are cut, since the code below holds them whole. */
function lawWords(law: Law): string {
  const list = (pairs: [number, number][]): string => `${pairs.slice(0, 12).map(([a, b]) => `(${number(a)}, ${number(b)})`).join(", ")}${pairs.length > 12 ? " and more" : ""}`;
  switch (law.family) {
    case "evidence": return "estimated from the log";
    case "drawn": return `drawn, straight between the knots (energy, density) ${list(law.knots ?? [])}`;
    case "tiers": return `levels (energy, weight) ${list((law.tiers ?? []).map((t) => [t.energy, t.weight]))}`;
    case "formula": return `in proportion to ${law.density ?? ""} on energies e from 0 to ${number(Number(law["top"] ?? 1))}`;
    default: return `${law.family}${Object.entries(law).filter(([k, v]) => k !== "family" && typeof v === "number").map(([k, v]) => ` ${k} ${String(v)}`).join(",")}`;
  }
}

function assumptions(e: Entry): string[] {
  const g = e.growth;
  const { kernel, fading, idling, expiry, levy } = g;
  const slower = [fading > 0 && `falls as a member's age to the power ${number(fading)}`, idling > 0 && `falls as the arrivals since it was last active to the power ${number(idling)}`].filter(Boolean);
  const rules = [
    g.headStart > 0 && `a head start of ${number(g.headStart)} tickets`, g.openShare > 0 && `${percent(g.openShare)} of links dealt to any member alike`, g.ceiling > 0 && `a ceiling of ${percent(g.ceiling)}`, g.distinct && "distinct partners",
    levy.rate > 0 && `a levy: links above ${percent(levy.above)} of all count ${percent(levy.rate)} less`, expiry > 0 && `links older than ${count(expiry)} arrivals count no more`,
  ].filter(Boolean);
  return [
    `Newcomers choose by fitness times tickets${kernel === 1 ? "" : ` to the power ${number(kernel)}`} (links they bring plus links received), ${number(g.links)} links each; ${slower.length > 0 ? `the pull ${slower.join(" and ")}` : "nothing else counts"}.`,
    `Law of energies: ${lawWords(e.law)}; sharpness ${number(e.sharpness)}; seed ${g.seed}.`,
    rules.length > 0 ? `Rules: ${rules.join(", ")}${g.leversFrom > 0 ? `, from ${count(g.leversFrom)} members on` : ""}.` : "No rule limits the choice.",
    "Shares are links received over all links. Endless growth is a limit: at any size one member may hold much of what the fittest hold together, and which one differs from run to run.",
  ];
}

/** The log's part of the brief. */
function LogPart(p: { ev: Evidence; heading: string; meaning: string; alone?: boolean }): JSX.Element {
  const { ev } = p;
  return (
    <div class="part">
      {!p.alone && <h2>The log: {p.heading}</h2>}
      <p>{p.meaning}</p>
      {ev.check.reasons.slice(otherwise(ev) ? 1 : 0).map((r) => <p key={r}>{r}</p>)}
      <p>{count(ev.rows)} rows read, {count(ev.used)} used; {count(ev.members)} members, {count(ev.links)} links. Leader {ev.top[0]?.id} with {percent((ev.top[0]?.links ?? 0) / Math.max(1, ev.links))}; top four {percent(ev.top4)}; HHI {number(ev.hhi)}.{ev.margin.low !== null ? ` Margin ${number(ev.margin.estimate)}, 95 % ${range(ev.margin)}.` : ""}</p>
      {ev.top[0] && <Origin m={ev.top[0]} />}
      {ev.notes.length > 0 && <p>{ev.notes.join(" ")}</p>}
    </div>
  );
}

/** A log that does not follow the plain rule stands by itself on paper: no entry grows from it. */
function LogBrief(p: { book: string; ev: Evidence; heading: string; meaning: string }): JSX.Element {
  const { ev } = p;
  const f = ev.forecast;
  return (
    <section class="paper" aria-label="Brief for print">
      <header>
        <p>{p.book}, {new Date().toISOString().slice(0, 10)}{preparedFor.value ? ` — prepared for ${preparedFor.value}` : ""}</p>
        <h1>{p.heading}</h1>
        <p>The link log{ev.label ? ` ${ev.label}` : ""}, as it was read; no entry of the casebook grows from it.</p>
      </header>
      <LogPart ev={ev} heading={p.heading} meaning={p.meaning} alone />
      <div class="charts four">
        <figure><figcaption>Shares as the log went, over members</figcaption><Drawn of={ev} draw={(x) => track(ev.track, x)} /></figure>
        {f?.given && <figure><figcaption>Whoever leads, to {count(f.links.at(-1) ?? 0)} links</figcaption><Drawn of={f} draw={(x) => ahead(f.links, f.leader, undefined, "leader", x)} /></figure>}
        {f && <figure><figcaption>The test on the log's own past, over links</figcaption><Drawn of={f} draw={(x) => ahead(f.past.links, f.past.leader, f.past.truth, "", x)} /></figure>}
        {f?.given && <figure><figcaption>Top ten together</figcaption><Drawn of={f} draw={(x) => ahead(f.links, f.topTen, undefined, "top ten", x)} /></figure>}
      </div>
      <div class="part">
        <table>
          <thead><tr><th scope="col">Largest members</th><th scope="col">Links</th><th scope="col">Share</th><th scope="col">Arrived as number</th></tr></thead>
          <tbody>{ev.top.slice(0, 5).map((m) => <tr key={m.id}><th scope="row">{m.id}</th><td>{count(m.links)}</td><td>{percent(m.links / Math.max(1, ev.links))}</td><td>{count(m.arrived + 1)}</td></tr>)}</tbody>
        </table>
      </div>
      {f?.given && (
        <div class="part">
          <h2>What is assumed</h2>
          <ul>
            <li>Newcomers and members choose by fitness, links held, age and recent activity, as fitted to this log; who is active, who joins and how often goes on as in the last 30 % of it.</li>
            <li>Bands hold 95 and 80 of 100 paths{f.factor > 1 ? `, widened ${f.factor.toFixed(1)} times for what the test on the past missed` : ""}. A change of rules or of who takes part is not in them.</li>
          </ul>
        </div>
      )}
      <p class="caution"><strong>Caution.</strong> {tables.value?.caution}</p>
      <Code />
    </section>
  );
}

/** The code that opens the casebook again. */
function Code(): JSX.Element {
  const d = doc.value;
  return (
    <>
      {briefCode.value && briefCode.value.length > longest && <p class="code">The code of this casebook has {count(briefCode.value.length)} characters, too many for paper: hand it round with the link or the case file.</p>}
      {d && briefCode.value && briefCode.value.length <= longest && (
        <p class="code">Opens again by this {fromFile() ? "code, pasted under “Open”" : "link, or by what follows its #c= pasted under “Open”"}: <code>{fromFile() ? briefCode.value : addressWith(briefCode.value, d.keys.indexOf(d.open))}</code></p>
      )}
    </>
  );
}

/** Paper only. */
export function PrintedBrief(): JSX.Element | null {
  const c = current.value;
  const d = doc.value;
  const s = solved.value?.value;
  const g = grown.value?.value;
  if (!c || !d || !s || !g) return null;
  const e = c.entry;
  const { outlook: o } = outlookOf(e);
  const ev = d.book.evidence;
  const atSize = s.verdict.atSize || (reached.value?.key === solved.value?.key ? reached.value?.value : "");
  const without = ["unknown", "gelation", "sublinear"].includes(s.regime) ? " without these levers" : "";
  const w = evidenceWords.value;
  if (ev && w && otherwise(ev) && briefOfLog.value) return <LogBrief book={d.book.title} ev={ev} heading={w.heading} meaning={w.meaning} />;
  return (
    <section class="paper" aria-label="Brief for print">
      <header>
        <p>{d.book.title}, {new Date().toISOString().slice(0, 10)}{preparedFor.value ? ` — prepared for ${preparedFor.value}` : ""}</p>
        <h1>{e.title || "Untitled entry"}</h1>
        {e.note && <p>{e.note}</p>}
      </header>
      <div class="top">
        {briefPicture.value && <img src={briefPicture.value} alt={`Picture of the network: ${g.leader.id} leads with ${percent(g.leader.share)}`} />}
        <div>
          <h2>{s.verdict.heading}</h2>
          <p>{s.verdict.line} {s.verdict.reason}</p>
          {!o && atSize && <p>{atSize}</p> /* an outlook says more, and one page is one page */}
          <table>
            <tbody>
              <tr><th scope="row">Leader at {count(g.members)} members</th><td>{g.leader.id}, {percent(g.leader.share)} of links</td></tr>
              <tr><th scope="row">Top four; HHI</th><td>{percent(g.top4)}; {number(g.hhi)}</td></tr>
              <tr><th scope="row">Lead changes so far</th><td>{g.leadChanges}</td></tr>
              <tr><th scope="row">Margin{without} (condensate below 1)</th><td>{number(s.margin)}</td></tr>
              <tr><th scope="row">Condensate{without}, endless growth</th><td>{s.condensate > 0 ? `${percent(s.condensate)} of links, on the fittest few together` : "none"}</td></tr>
              {s.dissolve.headStart !== null && <tr><th scope="row">Dissolved{without} by, alone</th><td>head start {number(s.dissolve.headStart)} or open share {percent(s.dissolve.openShare ?? 0)}</td></tr>}
            </tbody>
          </table>
        </div>
      </div>
      {ev && w && <LogPart ev={ev} heading={w.heading} meaning={w.meaning} />}
      <div class="charts">
        {ev && w ? <figure><figcaption>Shares as the log went</figcaption><Drawn of={ev} draw={(x) => track(ev.track, x)} /></figure> : <figure><figcaption>Share of all links over size</figcaption><Drawn of={g} draw={(x) => shares(g, x)} /></figure>}
        {o && <figure><figcaption>Leader's share to {count(o.horizon)} members, {o.runs} runs</figcaption><Drawn of={o} draw={(x) => fan(o, x)} /></figure>}
      </div>
      {o ? <div class="part"><h2>Outlook</h2>{o.sentences.map((x) => <p key={x}>{x}</p>)}</div> : <p>No outlook was run for these settings.</p>}
      <div class="part">
        <h2>What is assumed</h2>
        <ul>{assumptions(e).map((a) => <li key={a}>{a}</li>)}</ul>
      </div>
      <p class="caution"><strong>Caution.</strong> {tables.value?.caution}</p>
      <Code />
    </section>
  );
}
