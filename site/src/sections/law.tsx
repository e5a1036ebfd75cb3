// The fitness law: its family, its density, its parameters; drawn, typed, or in levels.
import type { JSX } from "preact";
import { useEffect, useId, useRef, useState } from "preact/hooks";
import { density } from "../charts/charts";
import { Figure } from "../charts/figure";
import { NumberCell, Slider } from "../controls/controls";
import { doc, editEntry, tables } from "../state/document";
import { drawOn, tryLaw, type LawFault } from "../state/laws";
import { grown, held } from "../state/results";
import type { Entry, Law, Tables } from "../state/types";
import { lawAxis } from "../state/view";
import { number } from "../words/format";
import { Knots } from "./knots";
import { begin, end, Section, standing } from "./section";

const setLaw = (law: Law): void => editEntry((e) => ({ ...e, law }));
const setGrowth = (g: Partial<Entry["growth"]>): void => editEntry((e) => ({ ...e, growth: { ...e.growth, ...g } }));

/** Levels to begin with, and a formula. */
const firstLevels = [{ energy: 0, weight: 0.1 }, { energy: 0.5, weight: 0.3 }, { energy: 1, weight: 0.6 }];
const firstFormula = "e*(2-e)";

function choose(t: Tables, name: string): void {
  const f = t.families.find((x) => x.name === name);
  const values = Object.fromEntries((f?.fields ?? []).map((x) => [x.name, x.default]));
  if (name === "drawn") void drawOn();
  else if (name === "tiers") setLaw({ family: name, tiers: firstLevels });
  else if (name === "formula") setLaw({ family: name, ...values, density: firstFormula });
  else setLaw({ family: name, ...values });
}

/** A formula that is typed: each version that can be used goes into the entry, of the others it says why not and where. */
function Formula(p: { law: Law; most: number }): JSX.Element {
  const id = useId();
  const [text, setText] = useState<string | undefined>(undefined);
  const [wrong, setWrong] = useState<LawFault | undefined>(undefined);
  const last = useRef("");
  useEffect(() => { if (text === undefined) setWrong(undefined); }, [text]);
  // What was typed stays until it works; an undo elsewhere takes over.
  useEffect(() => { if (!wrong) setText(undefined); }, [p.law.density]);
  const type = (v: string): void => {
    setText(v);
    last.current = v;
    void tryLaw({ ...p.law, density: v }).then((f) => { if (last.current === v) setWrong(f); });
  };
  const shown = text ?? p.law.density ?? "";
  const letters = [...shown];
  return (
    <div class="formula">
      <label for={id}>Density p(ε) in proportion to</label>
      <input
        id={id} type="text" value={shown} maxLength={p.most} autocomplete="off" spellcheck={false} aria-invalid={wrong ? "true" : undefined} aria-describedby={`${id}h`}
        onFocus={begin} onInput={(e) => type(e.currentTarget.value)} onBlur={() => { end(); if (!wrong) setText(undefined); }}
      />
      <div id={`${id}h`} class="hint">
        {wrong ? (
          <div role="alert">
            {wrong.at > 0 && <code aria-hidden="true">{letters.slice(0, wrong.at - 1).join("")}<mark>{letters[wrong.at - 1] ?? " "}</mark>{letters.slice(wrong.at).join("")}</code>}
            <span class="fault">{wrong.fault} In use is still {p.law.density}.</span>
          </div>
        ) : "e is the energy; + − * / ^ and exp, ln, sqrt, sin, cos, tanh, abs, min, max, pow. It is normalised by the program."}
      </div>
    </div>
  );
}

function Levels(p: { law: Law; most: number }): JSX.Element {
  const tiers = p.law.tiers ?? [];
  const set = (next: typeof tiers): void => setLaw({ ...p.law, tiers: next });
  const highest = Math.max(...tiers.map((t) => t.energy));
  return (
    <div class="scroll" tabIndex={0} role="region" aria-label="Levels">
      <table class="cells">
        <thead><tr><th scope="col">energy</th><th scope="col">weight</th><th scope="col"><span class="unseen">Change</span></th></tr></thead>
        <tbody>
          {tiers.map((t, i) => (
            <tr key={i}>
              <td><NumberCell label={`Energy of level ${i + 1}`} value={t.energy} low={-1e6} high={1e6} onChange={(v) => set(tiers.map((x, j) => (j === i ? { ...x, energy: v } : x)))} /></td>
              <td><NumberCell label={`Weight of level ${i + 1}`} value={t.weight} low={0} high={1e12} open onChange={(v) => set(tiers.map((x, j) => (j === i ? { ...x, weight: v } : x)))} /></td>
              <td><button type="button" disabled={tiers.length < 2} aria-label={`Take level ${i + 1} away`} onClick={() => set(tiers.filter((_, j) => j !== i))}>×</button></td>
            </tr>
          ))}
        </tbody>
      </table>
      <div class="buttons"><button type="button" disabled={tiers.length >= p.most} onClick={() => set([...tiers, { energy: highest + 0.5, weight: tiers.at(-1)?.weight ?? 1 }])}>Add a level</button></div>
    </div>
  );
}

/** What the law is like at its fittest end, in words. */
function edgeWords(edge: { theta: number | null; uncertainty: number | null; atom: number } | undefined): string {
  if (!edge) return "";
  if (edge.atom > 0) return `The fittest level holds ${number(100 * edge.atom)} % of the members, so no condensate forms.`;
  if (edge.theta === null) return "This law has no top fitness.";
  const unsure = edge.uncertainty ?? 0;
  const value = unsure > 1e-9 ? `${number(edge.theta)} (found numerically, ± ${number(unsure)})` : number(edge.theta);
  return `Edge exponent at the fittest end θ = ${value}${edge.theta > unsure ? "" : ": too many members near the top for a condensate"}.`;
}

export function LawSection(p: { entry: Entry }): JSX.Element | null {
  const t = tables.value;
  const s = standing();
  const [refused, setRefused] = useState<LawFault | undefined>(undefined);
  const { law } = p.entry;
  useEffect(() => setRefused(undefined), [law]);
  if (!t) return null;
  const family = t.families.find((f) => f.name === law.family);
  const g = grown.value?.value;
  const leader = g?.leader;
  const axis = lawAxis.value;
  const editing = law.family === "drawn" && axis === "energy";
  const change = (next: Law): void => {
    if (law.family === "formula") void tryLaw(next).then(setRefused);
    else setLaw(next);
  };
  return (
    <Section
      id="law" title="Fitness law"
      aside={<>{family?.formula ?? (law.family === "evidence" ? "read from the log" : "")} <button type="button" aria-pressed={axis === "fitness"} disabled={!s?.curves?.fitness?.length} onClick={() => (lawAxis.value = axis === "fitness" ? "energy" : "fitness")}>By fitness</button></>}
    >
      {editing && law.knots && <Knots knots={law.knots} most={t.limits.knots} curves={s?.curves} leader={leader} onBegin={begin} onEnd={end} onChange={(knots) => setLaw({ ...law, knots })} />}
      {s?.curves && !editing && (
        <Figure
          title={axis === "fitness" ? "Density of fitness" : "Density of energies p(ε)"} name="law" class="plain"
          summary={`Energies from ${number(s.curves.eps[0] ?? s.curves.levels[0]?.eps ?? 0)} to ${number(s.curves.eps.at(-1) ?? s.curves.levels.at(-1)?.eps ?? 0)}; the fittest have energy 0. ${edgeWords(s.edge)} ${leader ? `The leader ${leader.id} has energy ${number(leader.energy)}.` : ""}`}
          of={[s.curves, leader?.id, leader?.energy, held.value, axis]} draw={(w) => density(s.curves!, leader, held.value?.curves, axis, w)}
          table={() => (s.curves!.levels.length > 0 ? { columns: ["energy", "fitness", "weight"], rows: s.curves!.levels.map((l) => [l.eps, l.fitness, l.weight]) } : { columns: ["energy", "density", "fitness", "density of fitness"], rows: s.curves!.eps.map((e, i) => [e, s.curves!.density[i] ?? 0, s.curves!.fitness?.[i] ?? "", s.curves!.fitnessDensity?.[i] ?? ""]) })}
        />
      )}
      <p class="caption">{edgeWords(s?.edge)}{law.family === "drawn" && !editing ? " Knots are moved over energies." : ""}</p>
      <div class="chips" role="group" aria-label="Family of the law">
        {t.families.filter((f) => f.listed).map((f) => (
          <button type="button" key={f.name} aria-pressed={f.name === law.family} title={f.help} onClick={() => { if (f.name !== law.family) choose(t, f.name); }}>{f.title}</button>
        ))}
        {doc.value?.book.evidence?.law ? <button type="button" aria-pressed={law.family === "evidence"} onClick={() => choose(t, "evidence")}>From the log</button> : null}
      </div>
      {law.family === "formula" && <Formula law={law} most={t.limits.formula} />}
      {law.family === "tiers" && <Levels law={law} most={t.limits.tiers} />}
      {family?.fields.map((f) => (
        <Slider
          key={f.name} label={f.label} value={Number(law[f.name] ?? f.default)} low={f.low} high={f.high} slide={f.slide} step={f.step} open={f.open} help={f.help} onBegin={begin} onEnd={end}
          onChange={(v) => change({ ...law, [f.name]: v })}
        />
      ))}
      {refused && <p class="fault" role="alert">{refused.fault}</p>}
      {law.family !== "drawn" && <p class="buttons"><button type="button" onClick={() => void drawOn()} title="Turns this law into a drawn one close to it, whose knots can be moved">Draw on from here</button></p>}
      <Slider
        label="Sharpness β" value={p.entry.sharpness} low={0} high={t.limits.sharpness} slide={[0, 10]} step={0.05} help="how hard newcomers compare fitness; 0 is not at all" onBegin={begin} onEnd={end}
        onChange={(v) => editEntry((e) => ({ ...e, sharpness: v }))}
      />
      <Slider
        label="Links a newcomer m" value={p.entry.growth.links} low={1} high={t.limits.links} slide={[1, 12]} step={1} help="made by each newcomer, on average" onBegin={begin} onEnd={end}
        onChange={(v) => setGrowth({ links: v })}
      />
      <Slider
        label="Members" value={p.entry.growth.members} low={2} high={t.limits.members} slide={[100, 1_000_000]} step={1} log whole help="today's size" onBegin={begin} onEnd={end}
        onChange={(v) => setGrowth({ members: v })}
      />
      <Slider label="Seed" value={p.entry.growth.seed} low={0} high={4294967295} slide={[1, 50]} step={1} whole help="another seed is another history of the same rule" onBegin={begin} onEnd={end} onChange={(v) => setGrowth({ seed: v })} />
    </Section>
  );
}
