// What a log said: read and left out, whether the plain rule holds, and what follows.
import type { JSX } from "preact";
import { ahead, track } from "../charts/charts";
import { Figure } from "../charts/figure";
import { doc, tables } from "../state/document";
import { effect, signal } from "@preact/signals";
import { again, lastRead } from "../state/log";
import { engines } from "../state/results";
import type { Band, Evidence, EvidenceMember, Forecast } from "../state/types";
import { count, number, percent, range } from "../words/format";
import { Section } from "./section";

/** Heading and meaning of the evidence, made by the engine from what the casebook keeps. */
export const evidenceWords = signal<{ heading: string; meaning: string; explained: string } | undefined>(undefined);

export function watchEvidence(): void {
  let asked: Evidence | undefined;
  effect(() => {
    const e = doc.value?.book.evidence ?? undefined;
    if (e === asked) return;
    asked = e;
    evidenceWords.value = undefined;
    if (!e) return;
    void engines.main.ask<{ heading: string; meaning: string; explained: string }>("words", { evidence: e }).then((r) => { if (asked === e) evidenceWords.value = r.body; }, () => {});
  });
}

export function Origin(p: { m: EvidenceMember }): JSX.Element | null {
  const o = p.m.origin;
  if (!o) return null;
  const first = o.early >= o.good ? "early first, then good" : "good first, then early";
  return (
    <p class="says">
      {p.m.id} holds {count(p.m.links)} links: {number(o.mean)} that every member has on average × {number(o.early)} for arriving early × {number(o.good)} for being good ({range({ low: o.range[0], high: o.range[1] })}) × {number(o.chance)} chance. So: {first}.
    </p>
  );
}

/** The log is not one of the plain rule: the first of the reasons is the meaning, and no entry grows from it. */
export const otherwise = (e: Evidence): boolean => e.verdict === "none" || e.verdict === "forecast";

const table = (links: number[], b: Band, truth?: number[]) => () => ({
  columns: ["links", "low (2.5 %)", "10 %", "middle", "90 %", "high (97.5 %)", ...(truth ? ["happened"] : [])],
  rows: links.map((x, i) => [x, b.q025[i] ?? 0, b.q10[i] ?? 0, b.q50[i] ?? 0, b.q90[i] ?? 0, b.q975[i] ?? 0, ...(truth ? [truth[i] ?? 0] : [])]),
});

const between = (b: Band, i: number): string => `${percent(b.q50.at(i) ?? 0)} (${percent(b.q025.at(i) ?? 0)} to ${percent(b.q975.at(i) ?? 0)})`;

function Ahead(p: { f: Forecast }): JSX.Element {
  const { f } = p;
  const last = f.links.at(-1) ?? 0;
  return (
    <div id="forecast">
      {f.given && <Figure title="Share of whoever leads, ahead, over links made" name="forecast-leader" of={[f]} draw={(w) => ahead(f.links, f.leader, undefined, "leader", w)} table={table(f.links, f.leader)}
        summary={`At ${count(last)} links whoever leads then holds ${between(f.leader, -1)} of them.`} />}
      {f.given && <Figure title="Top ten together, ahead, over links made" name="forecast-top-ten" of={[f]} draw={(w) => ahead(f.links, f.topTen, undefined, "top ten", w)} table={table(f.links, f.topTen)}
        summary={`At ${count(last)} links the ten largest together hold ${between(f.topTen, -1)}.`} />}
      <Figure title="Leader: forecast made at 40 % of the log, and what happened" name="forecast-test" of={[f]} draw={(w) => ahead(f.past.links, f.past.leader, f.past.truth, "", w)} table={table(f.past.links, f.past.leader, f.past.truth)}
        summary={`Made at ${count(f.past.links[0] ?? 0)} links for ${count(f.past.links.at(-1) ?? 0)}: the leader at ${between(f.past.leader, -1)}; it came to ${percent(f.past.truth.at(-1) ?? 0)}.`} />
    </div>
  );
}

/** Reads the log again, treated otherwise, as long as it is here. */
function Treat(p: { e: Evidence }): JSX.Element | null {
  const last = lastRead.value;
  if (!last || last.file.label !== p.e.label) return null;
  const { leaveReplies, newcomersOnly } = last.mapping;
  return (
    <p class="buttons">
      <button type="button" onClick={() => void again({ leaveReplies: !leaveReplies })}>{leaveReplies ? "Take in links that answer an earlier one" : "Leave out links that answer an earlier one"}</button>
      <button type="button" onClick={() => void again({ newcomersOnly: !newcomersOnly })}>{newcomersOnly ? "Score all choices" : "Score newcomers' choices only"}</button>
    </p>
  );
}

export function EvidenceBlock(): JSX.Element | null {
  const e = doc.value?.book.evidence;
  const w = evidenceWords.value;
  if (!e) return null;
  const left = Object.entries(e.leftOut ?? {});
  const leader = e.top[0];
  return (
    <article class="evidence" aria-label="Evidence">
      <Section id="evidence" title="Evidence" aside={e.label || "from a link, names masked"}>
        <p class="verdict" id="evidence-verdict"><strong>{w?.heading ?? "…"}.</strong> {w?.meaning}</p>
        {e.check.reasons.slice(otherwise(e) ? 1 : 0).map((r) => <p key={r} class="says">{r}</p>)}
        {w && (e.verdict !== "none" || Number((e["rule"] as { gain?: number } | undefined)?.gain ?? 0) > 0) && <p class="caption">{w.explained}</p>}
        <p class="caution">{tables.value?.caution}</p>
        <dl class="pairs" id="evidence-figures">
          <div><dt>Members</dt><dd>{count(e.members)}</dd></div>
          <div><dt>Links</dt><dd>{count(e.links)} <small>{count(e.choices)} choices</small></dd></div>
          {leader && <div><dt>Leader</dt><dd>{leader.id} <small>{count(leader.links)} links, {percent(leader.links / Math.max(1, e.links))}</small></dd></div>}
          <div><dt>Top four together (CR4)</dt><dd>{percent(e.top4)}</dd></div>
          <div><dt>HHI</dt><dd>{number(e.hhi)} <small>points of 10,000</small></dd></div>
          <div><dt>Gini</dt><dd>{number(e.gini)}</dd></div>
          {e.margin.low !== null && <div><dt>Margin</dt><dd>{number(e.margin.estimate)} <small>95 %: {range(e.margin)}</small></dd></div>}
        </dl>
        {leader && <Origin m={leader} />}
        {e.forecast && <Ahead f={e.forecast} />}
        <Figure
          title="Shares as the log went, over members" name="log-shares" summary={`At ${count(e.members)} members the leader held ${percent(e.track.share.at(-1) ?? 0)} and the top four ${percent(e.top4)}.`}
          of={[e]} draw={(width) => track(e.track, width)}
          table={() => ({ columns: ["members", "leader", "top four", "HHI"], rows: e.track.members.map((n, i) => [n, e.track.share[i] ?? 0, e.track.top4[i] ?? 0, e.track.hhi[i] ?? 0]) })}
        />
        <details>
          <summary>Largest members</summary>
          <div class="scroll" tabIndex={0} role="region" aria-label="Largest members">
            <table id="evidence-members">
              <thead><tr><th scope="col">Member</th><th scope="col">Links</th><th scope="col">Share</th><th scope="col">Arrived</th><th scope="col">Fitness, 95 %</th><th scope="col">Early</th><th scope="col">Good</th></tr></thead>
              <tbody>{e.top.map((m) => (
                <tr key={m.id}><th scope="row">{m.id}</th><td>{count(m.links)}</td><td>{percent(m.links / Math.max(1, e.links))}</td><td>{count(m.arrived)}</td><td>{m.fitness ? `${number(m.fitness.estimate)} (${range(m.fitness)})` : "not estimated"}</td><td>{m.origin ? `× ${number(m.origin.early)}` : ""}</td><td>{m.origin ? `× ${number(m.origin.good)}` : ""}</td></tr>
              ))}</tbody>
            </table>
          </div>
        </details>
        <details>
          <summary>What was read</summary>
          <p class="says">{count(e.rows)} rows read, {count(e.used)} used{left.length > 0 ? `, left out: ${left.map(([reason, n]) => `${count(n)} because ${reason}`).join("; ")}` : ""}.</p>
          {e.notes.map((n) => <p key={n} class="says">{n}</p>)}
          <Treat e={e} />
        </details>
      </Section>
    </article>
  );
}
