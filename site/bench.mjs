// ./build.sh bench: links/s native and in the browser, slider to curves and to picture, sizes. Figures of one run on one
// machine; the ratios are what to compare.
import { build } from "esbuild";
import { execFileSync } from "node:child_process";
import { readFileSync, statSync } from "node:fs";
import { gzipSync } from "node:zlib";
import { chromium } from "playwright-core";

const here = (p) => new URL(p, import.meta.url);
const root = here("..").pathname;
const flags = ["--headless", "--no-sandbox", "--disable-quic", "--no-first-run", "--disable-background-networking", "--disable-component-update", "--disable-sync", "--use-gl=angle", "--use-angle=swiftshader", "--enable-unsafe-swiftshader"];
const median = (v) => [...v].sort((a, b) => a - b)[Math.floor(v.length / 2)];

console.log("sizes");
for (const name of ["engine", "stage"]) {
  const bytes = readFileSync(here(`build/${name}.wasm`));
  console.log(`  ${name}.wasm      ${(bytes.length / 1e6).toFixed(2)} MB, gzip ${(gzipSync(bytes, { level: 9 }).length / 1e6).toFixed(2)} MB`);
}
console.log(`  preponder.html   ${(statSync(here("dist/preponder.html")).size / 1e6).toFixed(2)} MB`);

console.log("solver, native (a solve with all curves)");
const solve = execFileSync("go", ["test", "./sim/bose", "-run", "xx", "-bench", "SolveWithCurves"], { cwd: root, encoding: "utf8" });
console.log(`  ${(Number(/(\d+) ns\/op/.exec(solve)[1]) / 1e6).toFixed(2)} ms`);

const native = {};
const out = execFileSync("go", ["test", "./sim/growth", "-run", "xx", "-bench", "Grow/condensate", "-benchtime", "20x"], { cwd: root, encoding: "utf8" });
for (const [, size, rate] of out.matchAll(/condensate\/(\d+)-?\d*\s+\d+\s+[\d.]+ ns\/op\s+([\d.]+) Mlinks/g)) native[Number(size)] = Number(rate);

const wire = (await build({ entryPoints: [here("src/engine/wire.ts").pathname], bundle: true, format: "iife", globalName: "benchWire", write: false })).outputFiles[0].text;
const browser = await chromium.launch({ executablePath: "/usr/bin/chromium", args: flags });
const page = await (await browser.newContext({ viewport: { width: 1440, height: 900 } })).newPage();
await page.addInitScript({ content: `${wire}\nwindow.benchWire = benchWire;` });
await page.goto(here("dist/preponder.html").href);
await page.locator(".plate").waitFor();

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

console.log("a sustained drag, an input in every frame for 4 s: frames, pictures and curves a second");
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
    const begun = performance.now();
    while (performance.now() - begun < 4000) {
      slider.value = String(200 + 5 * Math.abs(60 - (frames++ % 120))); // one step of the slider in every frame
      slider.dispatchEvent(new Event("input", { bubbles: true }));
      await new Promise(requestAnimationFrame);
    }
    const seconds = (performance.now() - begun) / 1000;
    slider.dispatchEvent(new PointerEvent("pointerup", { bubbles: true }));
    w.stageSaid = said;
    watch.disconnect();
    return { frames: frames / seconds, pictures: pictures / seconds, curves: curves / seconds };
  });
  console.log(`  ${String(members).padStart(6)} members: frames ${seen.frames.toFixed(0)}, pictures ${seen.pictures.toFixed(0)}, curves ${seen.curves.toFixed(0)}`);
}
await browser.close();
