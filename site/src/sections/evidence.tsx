// What a log said: read and left out, whether the plain rule holds, and what follows.
import type { JSX } from "preact";
import { track } from "../charts/charts";
import { Figure } from "../charts/figure";
import { doc, tables } from "../state/document";
import { effect, signal } from "@preact/signals";
import { engines } from "../state/results";
import type { Evidence, EvidenceMember } from "../state/types";
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
        {e.check.reasons.slice(e.verdict === "none" ? 1 : 0).map((r) => <p key={r} class="says">{r}</p>)}
        {w && e.verdict !== "none" && <p class="caption">{w.explained}</p>}
        {w && e.verdict === "none" && e.check.verdict === "does not fit" && Number((e["rule"] as { gain?: number } | undefined)?.gain ?? 0) > 0 && <p class="caption">{w.explained}</p>}
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
        <Figure
          title="Shares as the log went" name="log-shares" class="plain" summary={`At ${count(e.members)} members the leader held ${percent(e.track.share.at(-1) ?? 0)} and the top four ${percent(e.top4)}.`}
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
        </details>
      </Section>
    </article>
  );
}
