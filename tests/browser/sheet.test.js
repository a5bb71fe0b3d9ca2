// The setup sheet and the page's print view, printed from headless Chromium.
import assert from "node:assert/strict";
import { execFileSync } from "node:child_process";
import { writeFileSync } from "node:fs";
import { join } from "node:path";
import { after, before, test } from "node:test";
import { demo, drawing, folder, launch, make, open, read } from "./making.js";

let browser, template, crowded;
before(async () => {
  browser = await launch();
  template = make("sheet", demo("template.csv"));
  // Forty contours with long names: every list that can grow is full.
  const squares = Array.from({ length: 40 }, (_, i) => {
    const [x, y] = [i % 8 * 30, Math.floor(i / 8) * 30];
    return `<polyline points="${x},${y} ${x + 20},${y} ${x + 20},${y + 20} ${x},${y + 20} ${x},${y}"/><text>no</text>`;
  });
  const svg = `<svg xmlns="http://www.w3.org/2000/svg" width="240mm" height="150mm" viewBox="0 0 240 150">${squares.join("")}</svg>`;
  crowded = make("crowded", drawing(`${"long-name-".repeat(20)}.svg`, svg));
});
after(() => browser.close());

/** The text of each page of a printed PDF, read by an independent reader (poppler's). */
async function printed(page, name, format) {
  const path = join(folder, `${name}-${format}.pdf`);
  writeFileSync(path, await page.pdf({ format, printBackground: false }));
  const text = execFileSync("pdftotext", ["-layout", path, "-"], { encoding: "utf8" });
  return text.split("\f").slice(0, -1);
}

const flat = text => text.replace(/\s+/g, " ");

for (const format of ["A4", "Letter"]) {
  test(`sheet and print view take two pages of ${format} with nothing cut off`, async () => {
    for (const [name, made] of [["template", template], ["crowded", crowded]]) {
      for (const url of [made.sheet, made.url]) {
        const { page, heard, close } = await open(browser, url);
        const pages = await printed(page, name, format);
        assert.equal(pages.length, 2, `${name}: ${pages.length} pages`);
        assert.match(pages[0], /Setup sheet/);
        assert.match(pages[1], /Know what you cut/, "the last caution stands on the last page");
        await page.emulateMedia({ media: "print" });
        const over = await page.$$eval(".sheet", ([sheet]) => {
          const edge = sheet.getBoundingClientRect().right + 0.5;
          return [...sheet.querySelectorAll("*")].filter(e => e.getBoundingClientRect().right > edge).map(e => e.outerHTML.slice(0, 80));
        });
        assert.deepEqual(over, []);
        assert.deepEqual(heard, []);
        await close();
      }
    }
  });
}

test("the sheet says what the report and the program say", async () => {
  const { page, close } = await open(browser, template.sheet);
  const text = flat((await printed(page, "said", "A4")).join(" "));
  const { setup, program, check } = template.report;
  for (const said of [
    `Machine ${setup.machine}`, `${program.blocks}, of which ${program.motion_blocks} move`, `${program.bytes} bytes`,
    `Lowest Z ${setup.extents_mm[2]} mm`, `${setup.spindle_rpm} rev/min`, `6 mm in ${setup.passes} passes`,
    "the top of the stock", "Spindle warmed up", "Air cut run through", "thickness not given",
  ]) assert.ok(text.includes(said), `${said} in ${text}`);
  const all = flat(await page.textContent(".sheet"));
  for (const { name, state } of check.claims) if (state === "holds") assert.ok(all.includes(name), name);
  for (const open of check.not_checked) assert.ok(all.includes(open), open);
  // Places to take it up again are those of the report; a cut begins with a rapid to where it says.
  const restarts = template.report.program.restarts;
  const lines = [...all.matchAll(/cut \d+: line (\d+), from X (-?[\d.]+) mm, Y (-?[\d.]+) mm/g)];
  const begun = restarts.slice(0, 14).filter(place => place.below_mm === null);
  assert.deepEqual(lines.map(line => Number(line[1])), begun.map(place => place.line));
  for (const [, line, x, y] of lines) {
    const move = read(template.program).find(m => m.line === Number(line));
    assert.equal(move.mode, 0);
    assert.ok(Math.hypot(move.to.X - x, move.to.Y - y) < 0.1);
  }
  await close();
});

test("the sheet draws and tells stock, zero and clamps", async () => {
  const plate = drawing("plate.csv", "0,0\n120,0\n120,80\n0,80\n0,0\n");
  const clamps = ["--clamp", "0,40,12,60,4mm", "--clamp", "148,40,160,60,4mm"];
  const made = make("clamped", plate, "--stock", "160x120mm", "--origin", "stock", "--thickness", "11.8..12.2mm", ...clamps);
  const { page, heard, close } = await open(browser, made.sheet);
  const pages = await printed(page, "clamped", "A4");
  assert.ok(pages.length <= 2);
  const text = flat(await page.textContent(".sheet"));
  for (const label of ["clamp 1", "clamp 2", "4 mm high"]) assert.ok(flat(pages[0]).includes(label), label);
  for (const said of [
    "the lower left corner of the stock", "160 x 120 mm, 11.8 to 12.2 mm thick", "the bed is not cut",
    "1: X 0 to 12, Y 40 to 60, 4 mm above the stock",
  ]) assert.ok(text.includes(said), `${said} in ${text}`);
  const box = selector => page.$eval(selector, path => {
    const { x, y, width, height } = path.getBBox();
    return [x, -y - height, x + width, -y];
  });
  assert.deepEqual(await box(".drawing path.stock"), made.report.setup.stock.box_mm);
  assert.deepEqual(await box(".drawing path.clamp"), made.report.setup.clamps[0].box_mm);
  assert.match(await page.getAttribute(".drawing", "aria-label"), /on its stock, with 2 clamps/);
  assert.deepEqual(heard, []);
  await close();
});

test("the sheet is black on white whatever the screen is", async () => {
  const { page, close } = await open(browser, template.url, { colorScheme: "dark" });
  await page.emulateMedia({ media: "print", colorScheme: "dark" });
  const looks = await page.$eval(".sheet", e => [getComputedStyle(e).color, getComputedStyle(e).backgroundColor]);
  assert.deepEqual(looks, ["rgb(0, 0, 0)", "rgb(255, 255, 255)"]);
  const inks = await page.$$eval(".sheet dt, .sheet li, .sheet h2, .sheet dd", all => [...new Set(all.map(e => getComputedStyle(e).color))]);
  for (const ink of inks) assert.ok(ink.match(/\d+/g).every(c => Number(c) <= 0x33), ink);
  await close();
});
