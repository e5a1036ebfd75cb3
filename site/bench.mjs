// ./build.sh bench: links/s native and in the browser, slider to curves and to picture, sizes. Figures of one run on one
// machine; the ratios are what to compare.
import { build } from "esbuild";
import { execFileSync, spawnSync } from "node:child_process";
import { readFileSync, statSync } from "node:fs";
import { availableParallelism } from "node:os";
import { gzipSync } from "node:zlib";
import { chromium } from "playwright-core";

const here = (p) => new URL(p, import.meta.url);
const root = here("..").pathname;
const flags = ["--headless", "--no-sandbox", "--disable-quic", "--no-first-run", "--disable-background-networking", "--disable-component-update", "--disable-sync", "--use-gl=angle", "--use-angle=swiftshader", "--enable-unsafe-swiftshader"];
const median = (v) => [...v].sort((a, b) => a - b)[Math.floor(v.length / 2)];

if (process.argv[2] === "evidence") { // the calibration study: networks a setting, and their size
  const [networks = "60", size = "2000"] = process.argv.slice(3);
  const study = spawnSync("go", ["test", "./sim/evidence", "-run", "Calibration", "-v", "-timeout", "0", "-networks", networks, "-size", size], { cwd: root, encoding: "utf8" });
  console.log(`calibration, ${networks} networks a setting, ${size} members, 2 links a newcomer`);
  for (const [, line] of study.stdout.matchAll(/calibration_test\.go:\d+: (.*)/g)) console.log(`  ${line}`);
  process.exit(study.status);
}

console.log("sizes");
for (const name of ["engine", "stage"]) {
  const bytes = readFileSync(here(`build/${name}.wasm`));
  console.log(`  ${name}.wasm      ${(bytes.length / 1e6).toFixed(2)} MB, gzip ${(gzipSync(bytes, { level: 9 }).length / 1e6).toFixed(2)} MB`);
}
console.log(`  preponder.html   ${(statSync(here("dist/preponder.html")).size / 1e6).toFixed(2)} MB`);

console.log("a solve with curves of 400 points, ms: native, and the same by scipy's quad and brentq in the same run");
const solve = execFileSync("go", ["test", "./sim/bose", "-run", "xx", "-bench", "SolveWithCurves", "-benchtime", "300x"], { cwd: root, encoding: "utf8" });
const general = (() => {
  for (const python of ["python3", "/usr/bin/python3"]) {
    const r = spawnSync(python, ["-W", "ignore", "sim/bose/testdata/general.py"], { cwd: root, encoding: "utf8" });
    if (r.status === 0) return JSON.parse(r.stdout);
  }
  console.log("  (python3-scipy is not installed: no comparison)");
  return {};
})();
for (const [, name, ns] of solve.matchAll(/SolveWithCurves\/(\S+?)-?\d*\s+\d+\s+([\d.]+) ns\/op/g)) {
  const ms = Number(ns) / 1e6, other = general[name];
  console.log(`  ${name.padEnd(12)} ${ms.toFixed(2)}${other ? `, scipy ${other.toFixed(0)}, ratio ${(other / ms).toFixed(0)}` : ""}`);
}

console.log("growth of a condensate, fitness on, million links a second on one core and on all; beside it, on one core, plain attachment without fitness by igraph and by a few lines of C");
const native = {};
{
  const sizes = ["100000", "1000000", "10000000"];
  const run = (command, ...args) => { const r = spawnSync(command, args, { cwd: root, encoding: "utf8" }); return r.status === 0 ? r.stdout.trim().split("\n").map(Number) : []; };
  const c = (() => { const built = spawnSync("cc", ["-O2", "-o", here("build/plain").pathname, "sim/growth/testdata/plain.c"], { cwd: root }); return built.status === 0 ? run(here("build/plain").pathname, ...sizes) : []; })();
  const bag = ["python3", "/usr/bin/python3"].map((p) => run(p, "sim/growth/testdata/bag.py", ...sizes)).find((r) => r.length > 0) ?? [];
  const cores = availableParallelism(), together = {};
  const out = execFileSync("go", ["test", "./sim/growth", "-run", "xx", "-bench", "Grow/condensate", "-benchtime", "5x", "-cpu", `1,${cores}`], { cwd: root, encoding: "utf8" });
  for (const [, size, all, rate] of out.matchAll(/condensate\/(\d+)(-\d+)?\s+\d+\s+[\d.]+ ns\/op\s+([\d.]+) Mlinks/g)) (all ? together : native)[Number(size)] = Number(rate);
  sizes.forEach((size, i) => {
    const of = (seconds) => (seconds ? (2 * Number(size)) / seconds / 1e6 : NaN);
    const rate = native[Number(size)] ?? NaN;
    console.log(`  ${size.padStart(8)} members: ${rate.toFixed(1)} (${cores} cores ${together[Number(size)]?.toFixed(1) ?? "not measured"}), igraph ${of(bag[i]).toFixed(1)} (ratio ${(rate / of(bag[i])).toFixed(2)}), C ${of(c[i]).toFixed(0)} (ratio ${(rate / of(c[i])).toFixed(2)})`);
  });
}
console.log("the same under each lever, at 100,000 members");
for (const [, name, rate] of execFileSync("go", ["test", "./sim/growth", "-run", "xx", "-bench", "Levers", "-benchtime", "5x", "-cpu", "1"], { cwd: root, encoding: "utf8" }).matchAll(/Levers\/(\S+?)-?\d*\s+\d+\s+[\d.]+ ns\/op\s+([\d.]+) Mlinks/g)) console.log(`  ${name.replaceAll("_", " ").padEnd(12)} ${rate}`);

const wire = (await build({ entryPoints: [here("src/engine/wire.ts").pathname], bundle: true, format: "iife", globalName: "benchWire", write: false })).outputFiles[0].text;
const browser = await chromium.launch({ executablePath: "/usr/bin/chromium", args: flags });
const page = await (await browser.newContext({ viewport: { width: 1440, height: 900 } })).newPage();
await page.addInitScript({ content: `${wire}\nwindow.benchWire = benchWire;` });
await page.goto(here("dist/preponder.html").href);
await page.locator(".plate").waitFor();
await page.waitForTimeout(6000); // the stage starts, marks are made

console.log("growth in a condensate (power law, sharpness 3, 2 links), million links a second, growth and shares over size");
const engine = readFileSync(here("build/engine.wasm")).toString("base64");
for (const members of [1000, 100000, 1000000]) {
  const seconds = await page.evaluate(async ({ engine, members }) => {
    const bytes = Uint8Array.from(atob(engine), (c) => c.charCodeAt(0));
    const script = document.getElementById("wasm-exec").textContent + "\n" + document.getElementById("worker").textContent;
    const worker = new Worker(URL.createObjectURL(new Blob([script], { type: "text/javascript" })));
    worker.postMessage(await WebAssembly.compile(bytes));
    const ask = (kind, body) => new Promise((resolve) => {
      worker.onmessage = (e) => { const p = benchWire.decode(e.data); if (p.kind !== "progress") resolve(p.body); };
      worker.postMessage(benchWire.encode({ id: 1, kind, body, columns: [] }));
    });
    const casebook = { casebook: 1, entries: [{ sharpness: 3, growth: { members } }] };
    await ask("grow", { casebook, entry: 0 });
    const times = [];
    for (let i = 0; i < 7; i++) {
      const t = performance.now();
      await ask("grow", { casebook, entry: 0 });
      times.push(performance.now() - t);
    }
    worker.terminate();
    return times.sort((a, b) => a - b)[3] / 1000;
  }, { engine, members });
  const rate = (2 * members) / seconds / 1e6;
  console.log(`  ${String(members).padStart(8)} members: native growth alone ${native[members]?.toFixed(1)}, browser with its message ${rate.toFixed(1)}, ratio ${(rate / native[members]).toFixed(2)}`);
}

console.log("a solve with curves in the browser's worker, with its message, ms (median of 9)");
const shaped = {
  condensate: { sharpness: 3 }, "fit-get-rich": { law: { family: "power", theta: 0.2 }, sharpness: 1 }, beta: { law: { family: "beta", a: 2, b: 1.5 }, sharpness: 2 }, uniform: { law: { family: "uniform", low: 0 }, sharpness: 8 },
  gamma: { law: { family: "gamma", shape: 0.7, scale: 1 }, sharpness: 2 }, tiers: { law: { family: "tiers", tiers: [{ energy: 0, weight: 0.1 }, { energy: 0.5, weight: 0.3 }, { energy: 2, weight: 0.6 }] }, sharpness: 3 },
  drawn: { law: { family: "drawn", knots: [[0, 0], [0.2, 0.8], [0.4, 0.1], [0.8, 2], [1.3, 0]] }, sharpness: 3 }, "tiny ground": { law: { family: "drawn", knots: [[0, 1e-30], [0.2, 0.8], [1.3, 0]] }, sharpness: 8 },
  formula: { law: { family: "formula", density: "e*exp(-3*e)+0.2*e^4", top: 2 }, sharpness: 3 }, kinks: { law: { family: "formula", density: "abs(e-0.3)*max(0,sin(9*e))+e^2", top: 2 }, sharpness: 3 }, lognormal: { law: { family: "lognormal", sigma: 1 }, sharpness: 2 },
  "margin 1 + 1e-7": { law: { family: "power", theta: 0.2 }, sharpness: 4.539068 }, "drawn, margin 1 + 1e-7": { law: { family: "drawn", knots: [[0, 0], [0.2, 0.8], [0.4, 0.1], [0.8, 2], [1.3, 0]] }, sharpness: 1.506501 }, "formula, margin 1 + 1e-7": { law: { family: "formula", density: "e^0.3*exp(-e^2)", top: 4 }, sharpness: 3.3545365 },
  "corner, margin 1 + 1e-7": { law: { family: "formula", density: "e*sqrt(abs(e-0.5))", top: 1 }, sharpness: 1.41059193 }, "thirteen corners, margin 1 + 1e-7": { law: { family: "formula", density: "e*abs(sin(20*e))", top: 2 }, sharpness: 0.69684478 },
  "formula refused": { law: { family: "formula", density: `2+${"sin(97*e)*".repeat(17)}1`, top: 50 }, sharpness: 2 }, "nested and refused": { law: { family: "formula", density: "2+sin(3*".repeat(20) + "e" + ")".repeat(20), top: 50 }, sharpness: 2 },
};
for (const [name, entry] of Object.entries(shaped)) {
  const ms = await page.evaluate(async ({ engine, entry }) => {
    const bytes = Uint8Array.from(atob(engine), (c) => c.charCodeAt(0));
    const script = document.getElementById("wasm-exec").textContent + "\n" + document.getElementById("worker").textContent;
    const worker = new Worker(URL.createObjectURL(new Blob([script], { type: "text/javascript" })));
    worker.postMessage(await WebAssembly.compile(bytes));
    const ask = () => new Promise((resolve) => {
      worker.onmessage = (e) => resolve(benchWire.decode(e.data));
      worker.postMessage(benchWire.encode({ id: 1, kind: "solve", body: { casebook: { casebook: 1, entries: [entry] }, entry: 0, curves: true, columns: true }, columns: [] }));
    });
    const times = [];
    for (let i = 0; i < 12; i++) {
      const t = performance.now();
      await ask();
      times.push(performance.now() - t);
    }
    worker.terminate();
    return times.slice(3).sort((a, b) => a - b)[4];
  }, { engine, entry });
  console.log(`  ${name.padEnd(12)} ${ms.toFixed(1)}`);
}

console.log("from slider input to what is seen, ms (median and 90th percentile of 15)");
for (const members of [1000, 5000, 20000]) {
  const box = page.getByRole("textbox", { name: "Members", exact: true });
  await box.fill(String(members));
  await box.blur();
  await page.waitForFunction((n) => document.querySelector(".readout")?.textContent.includes(n.toLocaleString("en")), members);
  await page.waitForTimeout(1200);
  await page.locator("#standing .trio").scrollIntoViewIfNeeded();
  await page.locator("#standing .trio svg").first().waitFor();
  const { curves, picture } = await page.evaluate(async () => {
    const slider = [...document.querySelectorAll("input[type=range]")].find((e) => document.getElementById(e.getAttribute("aria-labelledby"))?.textContent.startsWith("Sharpness"));
    const w = document.querySelector("iframe").contentWindow;
    const said = w.stageSaid;
    let painted;
    w.stageSaid = (s) => { said(s); painted?.(); };
    slider.dispatchEvent(new PointerEvent("pointerdown", { bubbles: true }));
    const curves = [], picture = [];
    for (let i = 0; i < 15; i++) {
      const chart = document.querySelector("#standing .trio .chart");
      const before = chart.firstChild;
      const t = performance.now();
      const drawn = new Promise((resolve) => { const o = new MutationObserver(() => { if (chart.firstChild !== before) { o.disconnect(); resolve(performance.now() - t); } }); o.observe(chart, { childList: true }); });
      const seen = new Promise((resolve) => { painted = () => { painted = undefined; w.performance; resolve(performance.now() - t); }; });
      slider.value = String(200 + 20 * i);
      slider.dispatchEvent(new Event("input", { bubbles: true }));
      curves.push(await drawn);
      picture.push(await seen);
      await new Promise((r) => setTimeout(r, 300));
    }
    slider.dispatchEvent(new PointerEvent("pointerup", { bubbles: true }));
    w.stageSaid = said;
    return { curves, picture };
  });
  const p90 = (v) => [...v].sort((a, b) => a - b)[Math.floor(0.9 * v.length)];
  console.log(`  ${String(members).padStart(6)} members: curves ${median(curves).toFixed(0)} (${p90(curves).toFixed(0)}), picture ${median(picture).toFixed(0)} (${p90(picture).toFixed(0)})`);
}

console.log("a sustained drag, an input in every frame for 8 s, counted from the first picture on: frames a second, pictures and curves in 100 frames");
for (const members of [1000, 5000, 20000]) {
  const box = page.getByRole("textbox", { name: "Members", exact: true });
  await box.fill(String(members));
  await box.blur();
  await page.waitForFunction((n) => document.querySelector(".readout")?.textContent.includes(n.toLocaleString("en")), members);
  await page.waitForTimeout(1500);
  const seen = await page.evaluate(async () => {
    const slider = [...document.querySelectorAll("input[type=range]")].find((e) => document.getElementById(e.getAttribute("aria-labelledby"))?.textContent.startsWith("Sharpness"));
    const chart = document.querySelector("#standing .trio .chart");
    const w = document.querySelector("iframe").contentWindow;
    const said = w.stageSaid;
    let pictures = 0, curves = 0, frames = 0;
    w.stageSaid = (s) => { said(s); pictures++; };
    const watch = new MutationObserver(() => curves++);
    watch.observe(chart, { childList: true });
    slider.dispatchEvent(new PointerEvent("pointerdown", { bubbles: true }));
    let begun = 0;
    while (begun === 0 || performance.now() - begun < 8000) {
      if (begun === 0 && pictures > 0 && curves > 0) {
        begun = performance.now();
        pictures = curves = frames = 0;
      }
      slider.value = String(200 + 5 * Math.abs(60 - (frames++ % 120))); // one step of the slider in every frame
      slider.dispatchEvent(new Event("input", { bubbles: true }));
      await new Promise(requestAnimationFrame);
    }
    const seconds = (performance.now() - begun) / 1000;
    slider.dispatchEvent(new PointerEvent("pointerup", { bubbles: true }));
    w.stageSaid = said;
    watch.disconnect();
    return { frames: frames / seconds, pictures: (100 * pictures) / frames, curves: (100 * curves) / frames };
  });
  console.log(`  ${String(members).padStart(6)} members: frames ${seen.frames.toFixed(1)}, pictures ${seen.pictures.toFixed(1)}, curves ${seen.curves.toFixed(1)}`);
}
await browser.close();
