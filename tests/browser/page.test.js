// The preview page in headless Chromium: what it shows, what it does, and that it asks for nothing.
import assert from "node:assert/strict";
import { after, before, describe, test } from "node:test";
import { demo, drawing, frames, launch, make, open, read } from "./making.js";

let browser;
let template;
before(async () => {
  browser = await launch();
  template = make("template", demo("template.csv"));
});
after(() => browser.close());

/** A long straight cut on clamped stock. */
let slotMade;
const slot = () => slotMade ??= make("slot", drawing("slot.csv", "0,0\n200,0\n"), "--entry", "plunge", "--feed", "3000mm/min",
  "--stock", "320x80mm", "--origin", "stock", "--thickness", "12mm", "--clamp", "10,50,40,70,4mm");

/** Opens the template's page, does something with it, and holds that it stayed silent. */
async function onPage(act, options, made = template) {
  const { page, heard, close } = await open(browser, made.url, options);
  await act(page);
  assert.deepEqual(heard, []);
  await close();
}

const sight = page => page.$eval("#picture", svg => svg.getAttribute("viewBox").split(" ").map(Number));
/** The place of the window that shows a place of the program. */
const onScreen = (page, x, y) => page.$eval("#picture", (svg, [x, y]) => {
  const p = new DOMPoint(x, -y).matrixTransform(svg.getScreenCTM());
  return { x: p.x, y: p.y };
}, [x, y]);
const told = page => page.textContent("#told");
const pathBox = (page, id) => page.$eval(id, path => {
  const { x, y, width, height } = path.getBBox();
  return { x, y, width, height };
});
const near = (a, b, by, what) => assert.ok(Math.abs(a - b) <= by, `${what}: ${a} against ${b}`);

describe("what it says", () => {
  test("loads without a message and without a request, in light and dark", async () => {
    for (const colorScheme of ["light", "dark"]) {
      await onPage(async page => {
        assert.equal(await page.title(), `${demo("template.csv")}: chord error`);
      }, { colorScheme });
    }
  });

  test("figures equal the report's", () => onPage(async page => {
    const figures = await page.$$eval("[data-section]", all => all.map(dd => {
      const name = dd.getAttributeNames().find(name => name.startsWith("data-") && name !== "data-section");
      return { section: dd.dataset.section, name: name.slice(5), value: dd.getAttribute(name) };
    }));
    assert.ok(figures.length >= 25);
    for (const { section, name, value } of figures) {
      const place = section ? section.split(".").reduce((at, key) => at[key], template.report) : template.report;
      const expected = place[name];
      assert.ok(expected !== undefined, `${section} ${name} is in the report`);
      assert.deepEqual(typeof expected === "string" ? value : JSON.parse(value), expected, `${section} ${name}`);
    }
  }));

  test("figures equal an independent reading of the program", () => onPage(async page => {
    const moves = read(template.program);
    const figure = name => page.$eval(`[data-section=program][data-${name}]`, (dd, name) => Number(dd.getAttribute(`data-${name}`)), name);
    assert.equal(await figure("motion_blocks"), moves.length);
    assert.equal(await figure("bytes"), Buffer.byteLength(template.program));
    const cut = moves.filter(m => m.mode > 0).reduce((sum, m) => sum + m.length, 0);
    // Radii are rounded to a thousandth in the text, from either end.
    near(await figure("cut_length_mm"), cut, 1e-4 * cut, "length at feed");
  }));

  test("hovering a span tells its line, kind, length, radius, feed and deviation", () => onPage(async page => {
    const moves = read(template.program).filter(m => m.mode > 0 && m.from.Z < 0 && m.from.Z === m.to.Z && m.flat > 8);
    const lowest = Math.min(...moves.map(m => m.to.Z));
    const last = moves.filter(m => m.to.Z === lowest);
    assert.ok(last.length > 10);
    for (const m of last.slice(0, 5)) {
      const p = await onScreen(page, m.middle.X, m.middle.Y);
      await page.mouse.move(p.x, p.y);
      const words = await told(page);
      assert.ok(words.includes(`line ${m.line}: ${m.text}`), `${words} for ${m.text}`);
      near(Number(/length ([\d.]+) mm/.exec(words)[1]), m.length, 0.002, "length");
      assert.match(words, /^cut, (line|arc to the (left|right)), /);
      assert.match(words, /deviation 0\.\d{4} mm, feed \d+ mm\/min, mean speed \d+ mm\/min/);
      assert.match(words, /block \d+ of \d+/);
      if (m.mode >= 2) assert.match(words, /radius [\d.]+ mm/);
    }
  }));

  test("text has a contrast of 4.5 to 1 at least, in light and dark", async () => {
    for (const colorScheme of ["light", "dark"]) {
      await onPage(async page => {
        const worst = await page.evaluate(() => {
          const rgb = text => (text.match(/[\d.]+/g) || [0, 0, 0, 0]).map(Number);
          // WCAG 2.2, relative luminance and contrast ratio.
          const luminance = ([r, g, b]) => [r, g, b].map(c => c / 255)
            .map(c => c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4)
            .reduce((sum, c, i) => sum + c * [0.2126, 0.7152, 0.0722][i], 0);
          const ground = element => {
            for (let e = element; e; e = e.parentElement) {
              const colour = rgb(getComputedStyle(e).backgroundColor);
              if (colour.length < 4 || colour[3] === 1) return colour;
            }
            return [255, 255, 255];
          };
          const ratios = [];
          const walk = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
          while (walk.nextNode()) {
            const element = walk.currentNode.parentElement;
            if (!walk.currentNode.data.trim() || !element.checkVisibility() || element.closest("script")) continue;
            const style = getComputedStyle(element);
            const ink = element.closest("svg") ? style.fill : style.color;
            const [a, b] = [luminance(rgb(ink)), luminance(ground(element))].sort((a, b) => b - a);
            ratios.push({ ratio: (a + 0.05) / (b + 0.05), text: walk.currentNode.data.trim() });
          }
          return { least: ratios.sort((a, b) => a.ratio - b.ratio)[0], count: ratios.length };
        });
        assert.ok(worst.count > 80, `${worst.count} texts`);
        assert.ok(worst.least.ratio >= 4.5, JSON.stringify(worst.least));
      }, { colorScheme });
    }
  });
});

describe("what it does", () => {
  test("the wheel zooms about the pointer", () => onPage(async page => {
    const before = await sight(page);
    const target = { x: before[0] + before[2] * 0.3, y: -(before[1] + before[3] * 0.6) };
    const p = await onScreen(page, target.x, target.y);
    await page.mouse.move(p.x, p.y);
    await page.mouse.wheel(0, -400);
    await frames(page);
    const nearer = await sight(page);
    assert.ok(nearer[2] < 0.6 * before[2], `${nearer} after ${before}`);
    const stays = await onScreen(page, target.x, target.y);
    near(stays.x, p.x, 1, "x under the pointer");
    near(stays.y, p.y, 1, "y under the pointer");
    await page.mouse.wheel(0, 400);
    await frames(page);
    near((await sight(page))[2], before[2], 1e-6 * before[2], "width after zooming back");
  }));

  test("dragging moves the drawing with the pointer", () => onPage(async page => {
    const before = await sight(page);
    const place = [before[0] + before[2] / 2, -(before[1] + before[3] / 2)];
    const p = await onScreen(page, ...place);
    await page.mouse.move(p.x, p.y);
    await page.mouse.down();
    await page.mouse.move(p.x + 60, p.y - 40, { steps: 4 });
    await page.mouse.up();
    await frames(page);
    const q = await onScreen(page, ...place);
    near(q.x - p.x, 60, 1.5, "x");
    near(q.y - p.y, -40, 1.5, "y");
  }));

  test("two fingers zoom, and a tap tells a span", () => onPage(async page => {
    const before = await sight(page);
    const touch = await page.context().newCDPSession(page);
    const send = (type, points) => touch.send("Input.dispatchTouchEvent", {
      type, touchPoints: points.map(([x, y], id) => ({ x, y, id })),
    });
    await send("touchStart", [[400, 300], [500, 300]]);
    for (const by of [10, 20, 30, 40, 50]) await send("touchMove", [[400 - by, 300], [500 + by, 300]]);
    await send("touchEnd", []);
    await frames(page);
    near((await sight(page))[2] / before[2], 0.5, 0.03, "half the width in sight");
    await page.keyboard.press("0");
    await frames(page);
    const m = read(template.program).filter(m => m.mode > 0 && m.from.Z < 0 && m.flat > 15).at(-1);
    const p = await onScreen(page, m.middle.X, m.middle.Y);
    await page.touchscreen.tap(p.x, p.y);
    assert.ok((await told(page)).includes(`line ${m.line}: ${m.text}`), await told(page));
  }, { hasTouch: true }));

  test("keys move, zoom, step through the spans and find the worst place", () => onPage(async page => {
    const start = await sight(page);
    await page.keyboard.press("ArrowRight");
    await frames(page);
    near((await sight(page))[0] - start[0], start[2] / 8, 1e-6 * start[2], "a step to the right");
    await page.keyboard.press("+");
    await frames(page);
    assert.ok((await sight(page))[2] < start[2]);
    await page.keyboard.press("0");
    await frames(page);
    assert.deepEqual(await sight(page), start);

    await page.keyboard.press("n");
    const first = await told(page);
    await page.keyboard.press("n");
    assert.notEqual(await told(page), first);
    await page.keyboard.press("p");
    assert.equal(await told(page), first);

    await page.keyboard.press("w");
    await frames(page);
    const claim = template.report.check.claims.find(claim => claim.name === "the cut is within the tolerance of the drawing");
    const [, x, y] = /X (-?[\d.]+) Y (-?[\d.]+)/.exec(claim.at).map(Number);
    const [left, top, width, height] = await sight(page);
    assert.ok(width < 0.3 * start[2]);
    near(left + width / 2, x, 0.2, "x of the worst place");
    near(-(top + height / 2), y, 0.2, "y of the worst place");
    assert.match(await told(page), /deviation/);
  }));

  test("a click on the plot finds the place", () => onPage(async page => {
    const box = await page.locator("#plot").boundingBox();
    for (const share of [0.25, 0.7]) {
      await page.mouse.click(box.x + box.width * share, box.y + box.height / 2);
      await frames(page);
      const [, along] = /([\d.]+) mm along/.exec(await page.textContent("#plot-told"));
      const total = Number(/([\d.]+)/.exec(await page.textContent("#plot-to"))[1]);
      near(along / total, share, 0.01, "share of the way");
      const place = await pathBox(page, "#place");
      const [left, top, width, height] = await sight(page);
      near(place.x, left + width / 2, 0.01, "x in the middle of the window");
      near(place.y, top + height / 2, 0.01, "y in the middle of the window");
      // The place lies on the path that is told.
      const line = Number(/line (\d+):/.exec(await told(page))[1]);
      const move = read(template.program).find(m => m.line === line);
      const reach = move.flat / 2 + 0.01;
      assert.ok(Math.hypot(place.x - move.middle.X, -place.y - move.middle.Y) <= reach, `on line ${line}`);
    }
    const before = await page.getAttribute("#plot", "aria-valuenow");
    await page.focus("#plot");
    await page.keyboard.press("ArrowRight");
    assert.equal(Number(await page.getAttribute("#plot", "aria-valuenow")), Number(before) + 1);
    await page.click("#whole");
    await frames(page);
    const whole = await sight(page);
    await page.focus("#plot");
    await page.keyboard.press("Home");
    await page.keyboard.press("0");
    await frames(page);
    assert.deepEqual(await sight(page), whole, "other keys work on the plot too");
  }));

  test("the comb grows with its slider", () => onPage(async page => {
    const setTo = times => page.$eval("#enlarge", (slider, times) => {
      slider.step = "any";
      slider.value = Math.log10(times);
      slider.dispatchEvent(new Event("input"));
    }, times);
    const teeth = () => page.$$eval("#layer-comb path", paths => paths.flatMap(path =>
      [...path.getAttribute("d").matchAll(/l(-?[\d.]+) (-?[\d.]+)/g)].map(m => Math.hypot(m[1], m[2]))));
    assert.ok(!await page.isVisible("#layer-comb path >> nth=0"));
    await setTo(100);
    assert.ok(await page.isVisible("#layer-comb path >> nth=0"));
    assert.equal(await page.textContent("#enlarged"), "100");
    const at100 = await teeth();
    await setTo(200);
    const at200 = await teeth();
    const sum = all => all.reduce((a, b) => a + b, 0);
    near(sum(at200) / sum(at100), 2, 0.001, "twice as long");
    near(Math.max(...at100) / 100, template.report.check.deviation_mm, 0.1 * template.report.tolerance_mm, "the longest tooth");
  }));

  test("stock, zero and clamps are drawn where they lie, with a legend, a switch and words", () => onPage(async page => {
    const { setup } = slot().report;
    for (const [layer, [x0, y0, x1, y1]] of [["stock", setup.stock.box_mm], ["clamps", setup.clamps[0].box_mm]]) {
      const box = await pathBox(page, `#layer-${layer} path`);
      assert.deepEqual(box, { x: x0, y: -y1, width: x1 - x0, height: y1 - y0 }, layer);
      assert.ok(await page.isVisible(`#layer-${layer} path`));
      // The legend shows the line that is drawn.
      const inks = await page.$$eval(`#layer-${layer} path, label:has([data-layer=${layer}]) .key path`, all =>
        all.map(path => getComputedStyle(path).stroke));
      assert.ok(inks.length >= 2 && new Set(inks).size === 1, `${layer}: ${inks}`);
      await page.click(`[data-layer=${layer}]`);
      assert.ok(!await page.isVisible(`#layer-${layer} path`), layer);
    }
    assert.equal(await page.getByRole("checkbox", { name: "Clamps to keep clear of", exact: true }).count(), 1);
    assert.ok(await page.isVisible("#layer-zero path >> nth=0"));
    const groups = await page.$$eval("legend", all => all.map(legend => legend.textContent));
    assert.deepEqual(groups, ["Set zero", "Hold", "Cut", "Path against trace"]);
    const words = await page.$$eval("aside dl.setting dd", all => all.map(dd => dd.textContent));
    assert.deepEqual(words, [
      "the lower left corner of the stock", "the top of the stock",
      "320 x 80 mm, 12 mm thick, its lower left corner at X 0 Y 0 from zero", "the bed is not cut",
      "1: X 10 to 40, Y 50 to 70, 4 mm above the stock",
    ]);
    // All of the stock is in sight at first.
    const [left, top, width, height] = await sight(page);
    assert.ok(left <= 0 && top <= -80 && left + width >= 320 && top + height >= 0);
  }, {}, slot()));

  test("every switch shows and hides its layer", () => onPage(async page => {
    const switches = await page.$$eval("[data-layer]", all => all.map(box => box.dataset.layer));
    assert.ok(switches.length >= 12, switches.join());
    for (const layer of switches) {
      const visible = () => page.$eval(`#layer-${layer}`, g => getComputedStyle(g).display !== "none");
      const was = await visible();
      assert.equal(await page.isChecked(`[data-layer=${layer}]`), was);
      await page.click(`[data-layer=${layer}]`);
      assert.equal(await visible(), !was, layer);
    }
    const groups = await page.$$eval("legend", all => all.map(legend => legend.textContent));
    assert.deepEqual(groups, ["Set zero", "Cut", "Path against trace"]);
  }));

  test("the slider runs the cutter along the path in planned time", () => onPage(async page => {
    const setTo = time => page.$eval("#now", (slider, time) => {
      slider.value = time;
      slider.dispatchEvent(new Event("input"));
    }, time);
    const disc = () => page.$eval("#disc", disc => ({ x: Number(disc.getAttribute("cx")), y: -disc.getAttribute("cy"), r: Number(disc.getAttribute("r")) }));
    const total = template.report.program.time_s;
    near(Number(await page.getAttribute("#now", "max")), total, 0.001, "the whole time");
    assert.ok(!await page.isVisible("#disc"));
    await setTo(total / 2);
    assert.ok(await page.isVisible("#disc"));
    const half = await disc();
    assert.equal(half.r, template.report.setup.cutter_mm / 2);
    const line = Number(/line (\d+)/.exec(await page.textContent("#clock"))[1]);
    const move = read(template.program).find(m => m.line === line);
    assert.ok(Math.hypot(half.x - move.middle.X, half.y - move.middle.Y) <= move.flat / 2 + 0.01);
    await setTo(await page.getAttribute("#now", "max"));
    const end = await disc(), last = read(template.program).at(-1).to;
    near(end.x, last.X, 0.001, "x at the end");
    near(end.y, last.Y, 0.001, "y at the end");

    await setTo(0);
    await page.selectOption("#pace", "16");
    await page.click("#run");
    await page.waitForFunction(() => Number(document.getElementById("now").value) > 2);
    await page.click("#run");
    const stopped = await page.inputValue("#now");
    await frames(page);
    assert.equal(await page.inputValue("#now"), stopped);
  }));

  test("within a move the cutter gathers and loses speed as planned", () => onPage(async page => {
    const data = await page.$eval("#data", e => JSON.parse(e.textContent));
    const i = data.x.findIndex((x, i) => data.feed[i] > 0 && x === 260);
    const [begun, ended] = [data.ended[i - 1], data.ended[i]];
    const placeAt = async time => {
      await page.$eval("#now", (slider, time) => {
        slider.value = time;
        slider.dispatchEvent(new Event("input"));
      }, time);
      return { x: Number(await page.getAttribute("#disc", "cx")), said: await page.textContent("#clock") };
    };
    // Half of the shop router's 800 mm/s2 times the time squared, and at most the 10 mm/s of a corner to a plunge more.
    for (const time of [0.02, 0.04]) {
      const way = 400 * time * time;
      const gained = (await placeAt(begun + time)).x - 60, left = 260 - (await placeAt(ended - time)).x;
      for (const moved of [gained, left]) assert.ok(moved > way && moved < way + 10 * time, `${moved} mm in ${time} s`);
    }
    const middle = await placeAt((begun + ended) / 2);
    near(middle.x, 160, 0.1, "half way in half the time");
    assert.ok(middle.said.includes("cut at 3000 mm/min"), middle.said);
  }, {}, slot()));

  test("everything is reached by keyboard and has a name", () => onPage(async page => {
    const unnamed = await page.$$eval("button, input, select, [tabindex]", all => all
      .filter(e => !(e.getAttribute("aria-label") || e.textContent.trim() || e.labels?.[0]?.textContent.trim()))
      .map(e => e.outerHTML));
    assert.deepEqual(unnamed, []);
    const seen = new Set();
    for (let i = 0; i < 40; i++) {
      await page.keyboard.press("Tab");
      seen.add(await page.evaluate(() => document.activeElement.id || document.activeElement.dataset.layer));
    }
    for (const id of ["theme", "picture", "whole", "go-worst", "enlarge", "error", "plot", "run", "pace", "now"]) {
      assert.ok(seen.has(id), `${id} among ${[...seen]}`);
    }
    for (const [role, name] of [["checkbox", "Rapids"], ["slider", "Time"], ["slider", /^Comb/], ["button", "Worst place"], ["status", ""]]) {
      assert.equal(await page.getByRole(role, name && { name, exact: true }).count(), 1, `${role} ${name}`);
    }
  }));

  test("the page can be turned dark and light", () => onPage(async page => {
    const ground = () => page.evaluate(() => getComputedStyle(document.body).backgroundColor);
    const light = await ground();
    await page.click("#theme");
    const dark = await ground();
    assert.notEqual(dark, light);
    await page.click("#theme");
    assert.equal(await ground(), light);
  }));

  test("nothing runs out of a tablet's or a phone's screen", async () => {
    for (const viewport of [{ width: 820, height: 1180 }, { width: 390, height: 800 }]) {
      await onPage(async page => {
        const wide = await page.evaluate(() => document.documentElement.scrollWidth);
        assert.ok(wide <= viewport.width, `${wide} px`);
        const box = await page.locator("#picture").boundingBox();
        assert.ok(box.width > 0.5 * viewport.width && box.height > 200);
      }, { viewport });
    }
  });
});

describe("what it bears", () => {
  test("names with brackets, quotes, scripts and other letters are shown and run nothing", async () => {
    const layer = "</script><script>window.ran=1</script>\"'<img src=x onerror=window.ran=1>";
    const square = [[0, 0], [40, 0], [40, 30], [0, 30]].map(([x, y]) => `10\n${x}\n20\n${y}\n`).join("");
    const dxf = `0\nSECTION\n2\nHEADER\n9\n$ACADVER\n1\nAC1027\n9\n$INSUNITS\n70\n4\n0\nENDSEC\n0\nSECTION\n2\nENTITIES\n0\nLWPOLYLINE\n8\n${layer}\n90\n4\n70\n1\n${square}0\nENDSEC\n0\nEOF\n`;
    const name = "<b onmouseover=window.ran=1>'&\" Пример 図 ö.dxf";
    const made = make("hostile", drawing(name, dxf));
    await onPage(async page => {
      assert.ok((await page.textContent("h1")).includes(name));
      const box = await page.locator("#plot").boundingBox();
      await page.mouse.click(box.x + 100, box.y + 20);
      assert.ok((await page.textContent("#plot-told")).includes(layer));
      assert.equal(await page.evaluate(() => window.ran), undefined);
      assert.equal(await page.evaluate(() => document.images.length), 0);
    }, {}, made);
    await onPage(async page => assert.ok((await page.textContent("h1")).includes(name)), {}, { url: made.sheet });
  });

  test("a page of 20,000 blocks opens in two seconds and follows the hand", async () => {
    const rows = [0, 10, 20, 30].map(y => {
      const points = Array.from({ length: 401 }, (_, i) => `${i * 3},${y + 5 + i % 2 * 4}`);
      return `<polyline points="${points.join(" ")}"/>`;
    });
    const svg = `<svg xmlns="http://www.w3.org/2000/svg" width="1210mm" height="50mm" viewBox="0 0 1210 50">${rows.join("")}</svg>`;
    const made = make("large", drawing("large.svg", svg), "--pass", "0.45mm", "--entry", "plunge");
    const blocks = made.report.program.motion_blocks;
    assert.ok(blocks >= 20_000, `${blocks} blocks`);
    const size = Buffer.byteLength(made.page);
    assert.ok(size <= 300 * blocks + Buffer.byteLength(made.program) + 2e6, `${size} bytes`);
    const begun = performance.now();
    const { page, heard, close } = await open(browser, made.url);
    const opened = performance.now() - begun;
    const frame = await page.evaluate(async () => {
      const times = [];
      for (let i = 0; i < 30; i++) {
        const before = performance.now();
        document.body.dispatchEvent(new KeyboardEvent("keydown", { key: i % 2 ? "ArrowLeft" : "ArrowRight", bubbles: true }));
        await new Promise(done => requestAnimationFrame(() => requestAnimationFrame(done)));
        times.push((performance.now() - before) / 2);
      }
      return times.sort((a, b) => a - b)[Math.floor(times.length / 2)];
    });
    console.log(`# ${blocks} blocks, ${size} bytes: open after ${opened.toFixed(0)} ms, a frame takes ${frame.toFixed(0)} ms while panning`);
    assert.deepEqual(heard, []);
    assert.ok(opened <= 2000, `open after ${opened} ms`);
    assert.ok(frame <= 100, `a frame takes ${frame} ms`);
    await close();
  });
});
