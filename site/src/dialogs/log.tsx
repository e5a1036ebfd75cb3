// Reading a log, step by step.
import type { JSX } from "preact";
import { useRef } from "preact/hooks";
import { Check, Modal, Progress } from "../controls/controls";
import { backToMap, cancelLog, leaveOut, logFault, phase, read, remap, take, takeSample, type LogPhase } from "../state/log";
import { dialog } from "../state/view";
import { count, percent, seconds } from "../words/format";

async function fromFile(f: File): Promise<void> {
  await take(f.name, new Uint8Array(await f.arrayBuffer()));
}

function Choose(): JSX.Element {
  const pasted = useRef<HTMLTextAreaElement>(null);
  return (
    <>
      <p>A link log is a CSV file with one row a link: who linked to whom, and when. It is read on this machine and stays in this page.</p>
      <div
        class="drop" onDragOver={(e) => { e.preventDefault(); e.currentTarget.dataset.over = ""; }} onDragLeave={(e) => { delete e.currentTarget.dataset.over; }}
        onDrop={(e) => { e.preventDefault(); delete e.currentTarget.dataset.over; const f = e.dataTransfer?.files[0]; if (f) void fromFile(f); }}
      >
        <label class="field">Drop a file here, or choose one <input type="file" accept=".csv,.tsv,.txt,.gz,text/csv" onChange={(e) => { const f = e.currentTarget.files?.[0]; if (f) void fromFile(f); }} /></label>
      </div>
      <label class="field">Or paste rows <textarea ref={pasted} rows={4} spellcheck={false} placeholder={"time,source,target\n1,M1,M0"} /></label>
      <p class="buttons">
        <button type="button" onClick={() => void take("pasted rows", new TextEncoder().encode(pasted.current?.value ?? ""))}>Read what was pasted</button>
        <button type="button" onClick={() => void takeSample()}>Try the Larkmoor log</button>
      </p>
    </>
  );
}

const separators: [string, string][] = [[",", "comma"], [";", "semicolon"], ["\t", "tab"]];

function Columns(p: { phase: Extract<LogPhase, { at: "map" }> }): JSX.Element {
  const { preview, mapping, file } = p.phase;
  const columns = (role: "source" | "target" | "time", label: string): JSX.Element => (
    <label class="field">{label}
      <select value={mapping[role]} onChange={(e) => remap({ [role]: Number(e.currentTarget.value) })}>
        {role === "time" && <option value={-1}>the order of rows</option>}
        {preview.columns.map((c, i) => <option key={i} value={i}>{c || `column ${i + 1}`}</option>)}
      </select>
    </label>
  );
  const role = (i: number): string => (i === mapping.source ? "source" : i === mapping.target ? "target" : i === mapping.time ? "time" : "");
  return (
    <>
      <p><strong>{file.label}</strong>: {preview.why}. Correct it where it is wrong.</p>
      <div class="fields">
        {columns("source", "Source: who links")}
        {columns("target", "Target: to whom")}
        {columns("time", "Time")}
        <label class="field">Separator
          <select value={mapping.comma} onChange={(e) => void retake(p.phase, e.currentTarget.value)}>{separators.map(([v, n]) => <option key={v} value={v}>{n}</option>)}</select>
        </label>
        <Check label="The first row holds names" value={mapping.header} onChange={(v) => remap({ header: v })} />
        <Check label="Leave out links that answer an earlier one" value={mapping.leaveReplies} onChange={(v) => remap({ leaveReplies: v })} />
        <Check label="Score newcomers' choices only" value={mapping.newcomersOnly} onChange={(v) => remap({ newcomersOnly: v })} />
      </div>
      <div class="scroll" tabIndex={0} role="region" aria-label="First rows">
        <table>
          <thead><tr>{preview.columns.map((c, i) => <th key={i} scope="col">{c}{role(i) && <small> {role(i)}</small>}</th>)}</tr></thead>
          <tbody>{preview.rows.map((r, i) => <tr key={i}>{r.map((v, k) => <td key={k}>{v}</td>)}</tr>)}</tbody>
        </table>
      </div>
      <p class="buttons"><button type="button" class="primary" onClick={() => void read()}>Read the log</button><button type="button" onClick={() => (phase.value = { at: "choose" })}>Another file</button></p>
    </>
  );
}

async function retake(p: Extract<LogPhase, { at: "map" }>, comma: string): Promise<void> {
  remap({ comma });
  // Show the columns as they fall under the other separator.
  const lines = new TextDecoder().decode(p.file.bytes.subarray(0, 4000)).split(/\r?\n/).slice(0, 9).filter((l) => l !== "");
  const rows = lines.map((l) => l.split(comma));
  const now = phase.peek();
  if (now.at === "map" && rows[0]) phase.value = { ...now, preview: { ...now.preview, columns: rows[0], rows: rows.slice(1) } };
}

function Problems(p: { phase: Extract<LogPhase, { at: "problems" }> }): JSX.Element {
  const r = p.phase.report;
  return (
    <>
      <p id="log-problems"><strong>{count(r.rows - r.used)} of {count(r.rows)} rows cannot be used.</strong> The other {count(r.used)} hold {count(r.members)} members; the leader {r.leader.id} has {percent(r.leader.share)} of links.</p>
      <ul class="problems">{r.problems.map((q) => <li key={q.reason}>{count(q.count)} because {q.reason}:<ul>{q.first.map((f) => <li key={f}><code>{f}</code></li>)}</ul></li>)}</ul>
      <p class="buttons">
        <button type="button" class="primary" onClick={() => void leaveOut()}>Leave them out and go on</button>
        <button type="button" onClick={backToMap}>Back to the columns</button>
        <button type="button" onClick={() => (phase.value = { at: "choose" })}>Stop</button>
      </p>
    </>
  );
}

export function LogDialog(): JSX.Element {
  const p = phase.value;
  return (
    <Modal title="Read a log" wide onClose={() => { cancelLog(); dialog.value = undefined; }}>
      {logFault.value && <p class="fault" role="alert">{logFault.value}</p>}
      {p.at === "choose" && <Choose />}
      {p.at === "map" && <Columns phase={p} />}
      {p.at === "reading" && <Progress what="Reading the log" done={p.done} onCancel={cancelLog} />}
      {p.at === "problems" && <Problems phase={p} />}
      {p.at === "studying" && (
        <>
          <p>{count(p.report.members)} members, {count(p.report.links)} links. {p.report.leader.id} leads with {percent(p.report.leader.share)}; the top four hold {percent(p.report.top4)}.</p>
          <Progress what={p.what.charAt(0).toUpperCase() + p.what.slice(1)} done={p.done} left={p.done > 0.05 ? seconds((p.seconds / p.done) * (1 - p.done)) : undefined} onCancel={cancelLog} />
        </>
      )}
    </Modal>
  );
}
