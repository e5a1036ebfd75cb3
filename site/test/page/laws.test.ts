// Laws shaped by the user: drawn by hand, typed, in levels; the critical point gone to; what a drag leaves in a link.
import assert from "node:assert/strict";
import { readFileSync } from "node:fs";
import { after } from "node:test";
import type { Page } from "playwright-core";
import { closeBrowser, command, drawn, open, pageTest, put, says, text, violations } from "../harness";

after(closeBrowser);

/** A point of the drawn law's chart, in shares of its size. */
async function spot(page: Page, x: number, y: number): Promise<[number, number]> {
  const box = await page.locator(".knots .canvas > svg").boundingBox();
  assert.ok(box);
  return [box.x + x * box.width, box.y + y * box.height];
}

const margin = async (page: Page): Promise<number> => Number((await text(page, "#standing dl div:nth-child(4) dd")).split(" ")[0]);

pageTest("a law with two humps is drawn by hand, its margin crosses 1, and a link opens the same knots", {}, async ({ page }) => {
  await drawn(page);
  await page.getByRole("button", { name: "Draw on from here" }).click();
  await page.locator(".knots g").nth(1).waitFor();
  await says(page, "#standing .verdict", /keep 68 % of all links/); // the straight law, as knots
  await page.locator(".knots").scrollIntoViewIfNeeded();
  for (const [x, y] of [[0.25, 0.4], [0.45, 0.78], [0.65, 0.25]] as const) {
    const had = await page.locator(".knots g").count();
    await page.mouse.click(...(await spot(page, x, y)));
    await page.locator(".knots g").nth(had).waitFor();
  }
  await says(page, "#standing .verdict", /^Condensate/);
  assert.ok((await margin(page)) < 1);
  // The first knot is lifted: members at the very top, so never a condensate. The margin is infinite then.
  const first = page.locator(".knots g").first();
  const box = await first.boundingBox();
  assert.ok(box);
  await page.mouse.move(box.x + box.width / 2, box.y + box.height / 2);
  await page.mouse.down();
  await page.mouse.move(box.x + box.width / 2 + 30, box.y - 30, { steps: 6 });
  await says(page, "#standing .verdict", /^The fit get richer/);
  await says(page, "#law", /Edge exponent at the fittest end θ = 0: too many members/);
  await page.mouse.up();
  await page.getByRole("button", { name: "Undo" }).click();
  await says(page, "#standing .verdict", /^Condensate/);
  // Sharpness down by the field until the margin crosses 1.
  const field = page.getByRole("textbox", { name: "Sharpness β" });
  await field.fill("1");
  await says(page, "#standing .verdict", /^The fit get richer/);
  assert.ok((await margin(page)) > 1);
  await field.fill("4");
  await says(page, "#standing .verdict", /^Condensate/);
  // By keys: a knot moves, one is added, one goes.
  const knots = page.locator(".knots g");
  await knots.nth(2).focus();
  const before = await knots.nth(2).getAttribute("aria-valuetext");
  await page.keyboard.press("ArrowUp");
  await page.keyboard.press("ArrowRight");
  await page.waitForFunction((b) => document.querySelectorAll(".knots g")[2]?.getAttribute("aria-valuetext") !== b, before);
  await page.keyboard.press("+");
  await knots.nth(5).waitFor();
  await knots.nth(3).focus();
  await page.keyboard.press("Delete");
  await page.waitForFunction(() => document.querySelectorAll(".knots g").length === 5);
  // By touch, on numbers: nonsense is said, the knot stays.
  await page.getByText("Knots as numbers").click();
  const cell = page.getByRole("textbox", { name: "Energy of knot 2" });
  const good = await cell.inputValue();
  await cell.fill("9");
  await says(page, ".knots .fault", /must be above 0 and below/);
  await cell.blur();
  assert.equal(await cell.inputValue(), good);
  assert.deepEqual(await violations(page), []);
  const shape = await page.locator(".knots g").evaluateAll((g) => g.map((k) => k.getAttribute("aria-valuetext")));
  const figures = await text(page, "#standing dl");
  await page.getByRole("button", { name: "Share", exact: true }).first().click();
  await says(page, "#share-holds", /entries/);
  const link = await page.locator("#share-link").inputValue();
  const hash = link.slice(link.indexOf("#"));
  const other = await open({ hash });
  await drawn(other.page);
  await other.page.locator(".knots g").nth(4).waitFor();
  assert.deepEqual(await other.page.locator(".knots g").evaluateAll((g) => g.map((k) => k.getAttribute("aria-valuetext"))), shape);
  await says(other.page, "#standing dl", new RegExp(figures.replace(/[.*+?^${}()|[\]\\]/g, "\\$&")));
  await other.context.close();
});

pageTest("a formula is checked while it is typed, and solved as the command solves it", {}, async ({ page }) => {
  await drawn(page);
  await page.getByRole("button", { name: "Formula", exact: true }).click();
  const field = page.getByRole("textbox", { name: "Density p(ε) in proportion to" });
  await field.waitFor();
  await says(page, "#law", /Edge exponent at the fittest end θ = 1\./);
  await field.fill("e^1.5*(2-e");
  await says(page, ".formula .fault", /at character 11: a closing bracket is missing\. In use is still e\*\(2-e\)\./);
  await field.fill("e-1");
  await says(page, ".formula .fault", /The density is negative/);
  await field.fill("e^1.5*(2-e)");
  await says(page, "#law", /Edge exponent at the fittest end θ = 1\.50\./);
  assert.equal(await page.locator(".formula .fault").count(), 0);
  const solved = command(["solve", put("f.json", '{"casebook":1,"entries":[{"sharpness":3,"law":{"family":"formula","density":"e^1.5*(2-e)","top":2}}]}')]);
  await says(page, "#standing dl div:nth-child(4) dd", new RegExp(`^${(solved["margin"] as number).toPrecision(3)} `));
  // An end past which it would be negative is refused; what works stays.
  const top = page.getByRole("textbox", { name: "Ends at energy" });
  await top.fill("3");
  await says(page, "#law", /The density is negative/);
  await top.blur();
  assert.equal(await top.inputValue(), "2");
  // Undo takes the formula back to the one before.
  await page.getByRole("button", { name: "Undo" }).click();
  await says(page, "#law", /Edge exponent at the fittest end θ = 1\./);
});

pageTest("levels, log-normal, the other axis, and the critical sharpness", {}, async ({ page }) => {
  await drawn(page);
  await page.getByRole("button", { name: "Go to the critical sharpness 1.41" }).click();
  await says(page, "#standing dl div:nth-child(4) dd", /^1 condensate/);
  await says(page, "#standing dl div:nth-child(1) dd", /^(0|−\d\.\d+ × 10\^−\d+) /);
  // By pointing at the gauge.
  const gauge = await page.locator("#standing figure").first().locator(".chart").boundingBox();
  assert.ok(gauge);
  await page.mouse.click(gauge.x + gauge.width * 0.9, gauge.y + gauge.height / 2);
  await says(page, "#standing .verdict", /^Condensate/);
  await says(page, "#standing .says", /At the planned 20,000 members the pull is still .* short of its value in endless growth/);
  await page.getByText("More figures").click();
  await says(page, "#standing .figures", /Degree exponent\s*2 /);
  await page.getByRole("button", { name: "By fitness" }).click();
  await says(page, "#law", /fitness η = exp\(−βε\)/);
  await page.getByRole("button", { name: "Levels" }).click();
  await says(page, "#law", /The fittest level holds 10 % of the members, so no condensate forms/);
  await page.getByRole("textbox", { name: "Weight of level 1" }).fill("0");
  await says(page, "#law .cells .fault", /It must be above 0/);
  await page.getByRole("textbox", { name: "Weight of level 1" }).fill("0.9");
  await says(page, "#law", /The fittest level holds 50 % of the members/);
  await page.getByRole("button", { name: "Add a level" }).click();
  await page.getByRole("textbox", { name: "Energy of level 4" }).waitFor();
  assert.deepEqual(await violations(page), []);
  await page.getByRole("button", { name: "Log-normal" }).click();
  await says(page, "#standing .verdict", /^Records\. This law has no top fitness/);
  await says(page, "#standing .says", /the fittest is expected at .* times the middle fitness/);
  await says(page, "#standing dl div:nth-child(4) dd", /^none /);
});

pageTest("levers outside the theory say so, grow, and stand in a link", {}, async ({ page }) => {
  await drawn(page);
  const field = (name: string) => page.getByRole("textbox", { name, exact: true });
  await field("Kernel α").fill("1.3");
  await says(page, "#standing .verdict", /^Gelation\. With a kernel above 1 one member takes nearly all links in endless growth, whatever the fitness\. Figures and curves are those of the rule without: condensate\./);
  await says(page, ".readout .lead dd", /M\d+ [89]\d %/);
  await field("Idling").fill("0.7");
  await field("Levy").fill("0.5");
  await field("Levy above").fill("0.1");
  await field("Expiry").fill("800");
  await says(page, "#standing .verdict", /^No limit verdict\. The theory of endless growth does not cover idling, a levy, expiry and a kernel; the outlook answers\./);
  await says(page, "#standing dl div:nth-child(2) dd", /^none /);
  const grown = command(["grow", put("levers.json", '{"casebook":1,"entries":[{"sharpness":3,"growth":{"kernel":1.3,"idling":0.7,"levy":{"above":0.1,"rate":0.5},"expiry":800}}]}')]) as { leader: { id: string; share: number } };
  await says(page, ".readout .lead dd", new RegExp(`^${grown.leader.id} ${(100 * grown.leader.share).toFixed(grown.leader.share >= 0.0995 ? 0 : 1)} %$`));
  // Forward from today under the same rule.
  await field("Planned size").fill("6000");
  await field("Runs").fill("5");
  await page.getByRole("button", { name: "Run the outlook" }).click();
  await says(page, "#outlook-says", /At 6,000 members the leader holds/);
});

pageTest("the network is saved as a log, a table and GraphML", {}, async ({ page }) => {
  await drawn(page);
  const saved = async (name: string): Promise<string> => {
    const [download] = await Promise.all([page.waitForEvent("download"), page.getByRole("button", { name }).click()]);
    return readFileSync(await download.path(), "utf8");
  };
  const log = await saved("Save link log");
  assert.equal(log.split("\r\n").length, 2 + 2 * 4999); // a head, two links of each newcomer, a last line end
  assert.match(log, /^time,source,target\r\n1,M1,M0\r\n1,M1,M0\r\n2,M2,/);
  const table = await saved("Save members");
  assert.equal(table.split("\r\n").length, 5002);
  const links = table.split("\r\n").slice(1, -1).reduce((sum, row) => sum + Number(row.split(",")[3]), 0);
  assert.equal(links, 9998);
  const graph = await saved("Save GraphML");
  assert.equal(graph.match(/<node /g)?.length, 5000);
  assert.equal(graph.match(/<edge /g)?.length, 9998);
  assert.ok(graph.endsWith("</graph>\n</graphml>\n"));
});
