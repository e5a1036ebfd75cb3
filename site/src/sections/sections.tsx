// The sections of the unfolded entry.
import { signal } from "@preact/signals";
import type { JSX } from "preact";
import { useEffect, useState } from "preact/hooks";
import { degrees, exponent, fan, gauge, levelNames, levels, occupation, potential, potentialOverSize, shares } from "../charts/charts";
import { download, Figure } from "../charts/figure";
import { Check, Progress, Slider } from "../controls/controls";
import { doc, editEntry, tables } from "../state/document";
import { cancelGrowth, cancelOutlook, growAnyway, outlookKey, runOutlook } from "../state/edges";
import { cancelWriting, networkFile, writing, type NetworkFile } from "../state/export";
import { fault, grown, growing, held, outlookFault, outlooks, reached, running, solved, waitingToGrow } from "../state/results";
import { projection } from "../state/document";
import type { Entry, Outlook } from "../state/types";
import { quick } from "../state/view";
import { count, number, percent, seconds } from "../words/format";
import { begin, end, Section, standing } from "./section";

const setGrowth = (g: Partial<Entry["growth"]>): void => editEntry((e) => ({ ...e, growth: { ...e.growth, ...g } }));

/** Sharpness set by pointing at a chart over sharpness; close to the critical point it takes just that. */
function pointSharpness(critical: number | null, width: number, hold: (width: number | undefined) => void): (x: number, phase: "begin" | "move" | "end") => void {
  return (x, phase) => {
    if (phase === "begin") {
      hold(width); // the axis stands still while something is dragged along it
      begin();
    }
    const near = critical !== null && Math.abs(x - critical) < width * 0.012;
    const v = near ? critical : Math.round(x * 100) / 100;
    if (phase !== "end") editEntry((e) => ({ ...e, sharpness: Math.max(0, v) }));
    else {
      hold(undefined);
      end();
    }
  };
}

export function StandingSection(p: { entry: Entry }): JSX.Element | null {
  const s = standing();
  const g = grown.value?.value;
  const h = held.value;
  const [axisHeld, holdAxis] = useState<number | undefined>(undefined);
  if (!s) return <Section id="standing" title="Standing"><p>{fault.value ?? "Computing…"}</p></Section>;
  const sharp = p.entry.sharpness;
  const critical = s.criticalSharpness;
  const atSize = s.verdict.atSize || (reached.value?.key === solved.value?.key ? reached.value?.value : "");
  const gaugeEnd = axisHeld ?? (critical === null ? 0 : Math.max(2 * critical, sharp * 1.1));
  const mostBeta = s.curves?.beta?.at(-1) ?? 10;
  return (
    <Section
      id="standing" title="Standing"
      aside={<button type="button" aria-pressed={h !== undefined} onClick={() => (held.value = h ? undefined : s)} title="Keeps the present curves as a dashed line to compare with">Hold</button>}
    >
      {fault.value && <p class="fault" role="alert">{fault.value}</p>}
      <p class="verdict" aria-live="polite"><strong>{s.verdict.heading}.</strong> {s.verdict.line} {s.verdict.reason}</p>
      {atSize && <p class="says">{atSize}</p>}
      {s.criticalSharpness !== null && (
        <Figure
          title="Margin" name="margin" class="plain" summary={`Margin ${number(s.margin)}: ${s.verdict.margin}. A condensate forms where it is below 1, above sharpness ${number(s.criticalSharpness)}.`}
          of={[s, sharp]} draw={(w) => gauge(s, sharp, gaugeEnd, w)} onPoint={pointSharpness(critical, gaugeEnd, holdAxis)} table={() => ({ columns: ["quantity", "value"], rows: [["sharpness", sharp], ["critical sharpness", s.criticalSharpness ?? ""], ["margin", s.margin ?? "infinite"]] })}
        />
      )}
      {critical !== null && <p class="buttons"><button type="button" disabled={sharp === critical} onClick={() => editEntry((e) => ({ ...e, sharpness: critical }))}>Go to the critical sharpness {number(critical)}</button></p>}
      <dl class="pairs">
        <div><dt>Chemical potential μ</dt><dd>{s.regime === "records" ? "none" : sharp === 0 ? "−∞" : number(s.mu ?? 0)} <small>{s.condensate > 0 ? "at the ground level" : "in endless growth"}</small></dd></div>
        <div><dt>μ at this size</dt><dd>{sharp === 0 ? "−∞" : g ? number(g.muAtSize, "none") : "not yet"} <small>counted at {count(g?.members ?? 0)}</small></dd></div>
        <div><dt>Condensate, endless growth</dt><dd>{percent(s.condensate)} <small>of all links</small></dd></div>
        <div><dt>Margin</dt><dd>{number(s.margin, s.regime === "records" ? "none" : "∞")} <small>condensate below 1</small></dd></div>
      </dl>
      <details class="figures">
        <summary>More figures</summary>
        <dl class="pairs">
          <div><dt>Ground integral I(0)</dt><dd>{number(s.groundIntegral)} <small>balance {number(s.balance)}</small></dd></div>
          <div><dt>dμ/dβ</dt><dd>{number(s.muSlope, "none")}</dd></div>
          <div><dt>Leader's share grows as</dt><dd>{s.leaderExponent === null ? "no power" : <>N^{number(s.leaderExponent)}</>} <small>{s.halving === null ? "" : `halves every ${number(s.halving)}-fold`}</small></dd></div>
          <div><dt>Degree exponent</dt><dd>{number(s.degreeExponent, "none")} <small>of the tail</small></dd></div>
          <div><dt>Mean fitness</dt><dd>{number(s.meanFitness, "none")} <small>the fittest have 1</small></dd></div>
          <div><dt>Estimated relative error</dt><dd>{number(Math.max(s.errors.groundIntegral ?? 0, s.errors.mu ?? 0), "unknown")} <small>of these figures</small></dd></div>
        </dl>
      </details>
      {s.regime !== "records" && <div class="trio">
        <Figure
          title="Growth rate f(ε)" name="growth-rate" summary="The exponent with which a member's tickets grow, falling with energy." of={[s, g, h]} draw={(w) => exponent(s, g, h, w)}
          table={() => ({ columns: ["energy", "f"], rows: (s.curves?.eps ?? []).map((e, i) => [e, s.curves?.exponent?.[i] ?? ""]) })}
        />
        <Figure
          title="Links held n(ε)" name="occupation" summary={`The Bose curve, and ${g?.counted?.length ?? 0} open circles: links counted at each level of this very network at its full size, with one standard error.`} of={[s, g, h]} draw={(w) => occupation(s, g, h, w)}
          table={() => ({ columns: ["energy", "n of the theory", "counted n", "standard error", "members"], rows: [...(g?.counted ?? []).map((c) => [c.eps, "", c.n, c.error, c.members]), ...(s.curves?.eps ?? []).map((e, i) => [e, s.curves?.occupation?.[i] ?? "infinite", "", "", ""])] })}
        />
        <Figure
          title="Potential βμ over β" name="potential" summary={`Rises to 0 ${s.criticalSharpness !== null ? `at the critical sharpness ${number(s.criticalSharpness)} and stays there` : "without reaching it: this law has no critical sharpness"}.`} of={[s, sharp]} draw={(w) => potential(s, sharp, w)} onPoint={pointSharpness(critical, mostBeta, () => {})}
          table={() => ({ columns: ["sharpness", "beta mu"], rows: (s.curves?.beta ?? []).map((b, i) => [b, s.curves?.betaMuOver?.[i] ?? ""]) })}
        />
      </div>}
      {(g?.counted?.length ?? 0) > 0 && s.regime !== "records" && <p class="caption">Circles: links counted at each level of this network at its full size. In a condensate they lie above the curve while the ground level is still filling.</p>}
    </Section>
  );
}

/** The network as files. */
const files: { what: NetworkFile; name: string; label: string; help: string }[] = [
  { what: "log", name: "network.csv", label: "Save link log", help: "time, source, target of every link grown here, as CSV" },
  { what: "degrees", name: "members.csv", label: "Save members", help: "arrival, energy, links and share of every member, as CSV" },
  { what: "graphml", name: "network.graphml", label: "Save GraphML", help: "for programs that draw or analyse graphs" },
];

export function SharesSection(): JSX.Element {
  const g = grown.value?.value;
  const busy = growing.value;
  return (
    <Section id="shares" title="Shares over size" aside="members, log scale">
      {waitingToGrow.value && <p>This network is large. <button type="button" onClick={growAnyway}>Grow it</button></p>}
      {busy && <Progress what="Growing the network" done={busy.done} onCancel={cancelGrowth} />}
      {g && (
        <>
          {g.from > 1 && <p class="caption">This entry begins with the network the log left, at {count(g.from)} members; how its shares went before stands under Evidence.</p>}
          {g.path.members.length > 3 && <Figure
            title="Share of all links" name="shares" class="plain" every={quick.value ? 200 : 0} summary={`${g.leader.id} leads with ${percent(g.leader.share)} at ${count(g.members)} members; ${g.leadChanges} lead changes that lasted.`}
            of={[g]} draw={(w) => shares(g, w)}
            table={() => ({ columns: ["members", "leader's share", "top four", "HHI", "Gini", ...g.ranking.slice(0, g.path.followed.length).map((r) => r.id)], rows: g.path.members.map((n, i) => [n, g.path.share[i] ?? 0, g.path.top4[i] ?? 0, g.path.hhi[i] ?? 0, g.path.gini[i] ?? 0, ...g.path.followed.map((f) => f[i] ?? 0)]) })}
            note="Dashed: whoever leads. Marks at the top: the lead changed for good (for 5 % of growth at least)."
          />}
          <div class="duo">
            <Figure
              title="Members by links held" name="degrees" every={quick.value ? 200 : 0} summary={`How links received are spread at ${count(g.members)} members; the most are ${count(g.tail.links.at(-1) ?? 0)}, held by ${g.leader.id}.`}
              of={[g]} draw={(w) => degrees(g, w)} table={() => ({ columns: ["links", "share of members with so many or more"], rows: g.tail.links.map((k, i) => [k, g.tail.share[i] ?? 0]) })}
            />
            <Figure
              title="Potential βμ over size" name="potential-over-size" every={quick.value ? 200 : 0}
              summary={g.betaMuAtSize === null ? "Not counted: the theory does not cover this rule." : `Counted in this network as it grew: ${number(g.betaMuAtSize)} at ${count(g.members)} members; ${number(standing()?.betaMu, "none")} in endless growth.`}
              of={[g, standing()?.betaMu]} draw={(w) => potentialOverSize(g, standing()?.betaMu ?? null, w)} table={() => ({ columns: ["members", "beta mu"], rows: g.path.members.map((n, i) => [n, g.path.betaMu[i] ?? ""]) })}
            />
          </div>
          {g.from === 1 && <Figure
            title="Links held by the fittest 0.1, 1, 10 and 50 % of the law" name="levels" every={quick.value ? 200 : 0} summary={`At ${count(g.members)} members ${g.path.levels.map((l, i) => `the ${levelNames[i]} hold ${percent(l.at(-1) ?? 0)}`).join(", ")} of all links.`}
            of={[g]} draw={(w) => levels(g, w)} table={() => ({ columns: ["members", ...levelNames], rows: g.path.members.map((n, i) => [n, ...g.path.levels.map((l) => l[i] ?? 0)]) })}
          />}
          <dl class="pairs">
            <div><dt>Top four together (CR4)</dt><dd>{percent(g.top4)}</dd></div>
            <div><dt>HHI</dt><dd>{number(g.hhi)} <small>points of 10,000</small></dd></div>
            <div><dt>Gini of links received</dt><dd>{number(g.gini)}</dd></div>
            <div><dt>Lead changes</dt><dd>{g.leadChanges}</dd></div>
          </dl>
          {writing.value ? <Progress what="Writing the network" done={writing.value.done} onCancel={cancelWriting} /> : (
            <div class="buttons" role="group" aria-label="Save the network">
              {files.map((f) => <button type="button" key={f.what} title={f.help} onClick={() => void networkFile(f.what).then((b) => { if (b) download(f.name, b, b.type); })}>{f.label}</button>)}
            </div>
          )}
        </>
      )}
    </Section>
  );
}

const lastOutlook = signal<{ entry: number; outlook: Outlook } | undefined>(undefined);

/** The outlook that belongs to the open entry, and whether its settings were changed since. */
export function outlookOf(e: Entry): { outlook: Outlook | undefined; key: string } {
  const d = doc.value;
  const key = d ? outlookKey(projection(d.book, e), e) : "";
  return { outlook: outlooks.value.get(key), key };
}

export function OutlookSection(p: { entry: Entry }): JSX.Element {
  const t = tables.value;
  const { outlook: o, key } = outlookOf(p.entry);
  const run = running.value;
  const mine = run?.key === key;
  useEffect(() => { if (o && doc.value) lastOutlook.value = { entry: doc.value.open, outlook: o }; }, [o]);
  const left = run && run.done > 0 ? ((performance.now() - run.since) / 1000 / run.done) * (run.of - run.done) : undefined;
  const set = (x: Partial<Entry["outlook"]>): void => editEntry((e) => ({ ...e, outlook: { ...e.outlook, ...x } }));
  return (
    <Section id="outlook" title="Outlook" aside={o ? `leader's share, ${o.runs} runs` : "not run yet for these settings"}>
      <Slider label="Planned size" value={p.entry.outlook.horizon} low={2} high={t?.limits.members ?? 1e7} slide={[1000, 1_000_000]} step={1} log whole unit="members" help="how far to grow on from today" onBegin={begin} onEnd={end} onChange={(v) => set({ horizon: v })} />
      <Slider label="Limit" value={p.entry.outlook.limit} low={0} high={1} slide={[0, 1]} step={0.01} unit="share of all links, 20 % or 0.2" help="your own limit for one member" onBegin={begin} onEnd={end} onChange={(v) => set({ limit: v })} />
      <Slider label="Runs" value={p.entry.outlook.runs} low={1} high={t?.limits.runs ?? 10000} slide={[20, 1000]} step={10} whole help="more runs, surer figures" onBegin={begin} onEnd={end} onChange={(v) => set({ runs: v })} />
      {run ? (
        <Progress what={`${run.done} of ${run.of} runs made${mine ? "" : " for another entry"}`} done={run.done / run.of} left={left === undefined ? undefined : seconds(left)} onCancel={cancelOutlook} />
      ) : (
        <p class="buttons"><button type="button" onClick={() => void runOutlook()}>{o ? "Run again" : "Run the outlook"}</button></p>
      )}
      {!o && !run && lastOutlook.value && lastOutlook.value.entry === doc.value?.open && <p class="caption">The settings changed since the last outlook, which said: {lastOutlook.value.outlook.sentences[0]} Run it again for these.</p>}
      {outlookFault.value && <p class="fault" role="alert">{outlookFault.value}</p>}
      {o && (
        <>
          {o.runs < p.entry.outlook.runs && <p class="caption">Partial: {o.runs} of {p.entry.outlook.runs} runs.</p>}
          <Figure
            title="Leader's share from today to the planned size" name="outlook" class="plain" summary={o.sentences.join(" ")} of={[o]} draw={(w) => fan(o, w)}
            table={() => ({ columns: ["members", "2.5 %", "10 %", "median", "90 %", "97.5 %", "mean"], rows: o.bySize.map((b) => [b.members, b.q025, b.q10, b.q50, b.q90, b.q975, b.mean]) })}
            note="Bands: 95 and 80 of 100 runs. Whoever leads at each size."
          />
          <div id="outlook-says">{o.sentences.map((x) => <p key={x} class="says">{x}</p>)}</div>
          <dl class="pairs">
            <div><dt>Top four at {count(o.horizon)}</dt><dd>{percent(o.top4.q50)} <small>{percent(o.top4.q025)} to {percent(o.top4.q975)}</small></dd></div>
            <div><dt>HHI at {count(o.horizon)}</dt><dd>{number(o.hhi.q50)} <small>{number(o.hhi.q025)} to {number(o.hhi.q975)}</small></dd></div>
          </dl>
        </>
      )}
    </Section>
  );
}

/** A lever's name may lead into a part of the growth: "levy.rate". */
const leverOf = (g: Entry["growth"], name: string): unknown => name.split(".").reduce<unknown>((at, part) => (at as Record<string, unknown> | undefined)?.[part], g);
const withLever = (g: Entry["growth"], name: string, v: number | boolean): Partial<Entry["growth"]> => {
  const [part = name, inner] = name.split(".");
  return { [part]: inner === undefined ? v : { ...(g[part] as object), [inner]: v } };
};

export function LeversSection(p: { entry: Entry }): JSX.Element | null {
  const t = tables.value;
  const s = standing();
  if (!t) return null;
  const g = p.entry.growth;
  return (
    <Section id="levers" title="Levers" aside="rules that change the choice">
      {t.levers.map((l) =>
        l.yes ? (
          <Check key={l.name} label={l.label} help={l.help} value={Boolean(leverOf(g, l.name))} onChange={(v) => setGrowth(withLever(g, l.name, v))} />
        ) : (
          <Slider key={l.name} label={l.label} value={Number(leverOf(g, l.name))} whole={l.step >= 1} low={l.low} high={l.high} slide={l.slide} step={l.step} unit={l.unit} help={l.help} onBegin={begin} onEnd={end} onChange={(v) => setGrowth(withLever(g, l.name, v))} />
        ),
      )}
      <Slider label="In force from" value={g.leversFrom} low={0} high={t.limits.members} slide={[0, 20000]} step={100} whole unit="members" help="0 is from the start; today's size makes it a rule for newcomers to come" onBegin={begin} onEnd={end} onChange={(v) => setGrowth({ leversFrom: v })} />
      {s && s.dissolve.headStart !== null && s.dissolve.openShare !== null && (
        <p class="says">Alone, a head start of {number(s.dissolve.headStart)} tickets or an open share of {percent(s.dissolve.openShare)} dissolves this condensate in endless growth.</p>
      )}
    </Section>
  );
}
