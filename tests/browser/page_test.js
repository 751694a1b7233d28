// The live page in a real browser, fed by the real daemon with rehearsals:
// every verdict is shown as it comes, nothing hostile runs, nothing is written
// to the console, and it fits a phone. Prints "N passed, M failed" at its end.
//
// LASTSCAN_BUILD names the build folder; playwright-core is found on NODE_PATH.
"use strict";

const {spawn, execFileSync} = require("node:child_process");
const fs = require("node:fs");
const http = require("node:http");
const os = require("node:os");
const path = require("node:path");
const {chromium} = require("playwright-core");

const build = process.env.LASTSCAN_BUILD || path.join(__dirname, "..", "..", "build");
const pictures = path.join(build, "browser");
const work = fs.mkdtempSync(path.join(os.tmpdir(), "lastscan-page-"));
const at = `ipc://${work}/request.sock`;
const hostile = `"'><img src=x onerror="document.title='owned'"><script>document.title='owned'</script>`;
const verdicts = ["enough", "on course", "extend", "out of reach", "inspect", "undecided"];
const children = [];
let passed = 0;
let failed = 0;

function check(name, fine, seen) {
  if (fine) {
    ++passed;
    console.log(`ok      ${name}`);
  } else {
    ++failed;
    console.log(`NOT OK  ${name}${seen === undefined ? "" : `: ${JSON.stringify(seen)}`}`);
  }
}

const pause = (seconds) => new Promise((done) => setTimeout(done, 1000 * seconds));

async function until(what, seconds, condition) {
  for (const end = Date.now() + 1000 * seconds; Date.now() < end; await pause(0.1)) {
    const value = await condition();
    if (value) return value;
  }
  throw new Error(`waited ${seconds} s in vain: ${what}`);
}

function start(program, ...options) {
  const child = spawn(path.join(build, program), options, {stdio: ["ignore", "pipe", "pipe"]});
  child.output = "";
  child.stdout.on("data", (data) => child.output += data);
  child.stderr.on("data", (data) => child.output += data);
  child.ended = new Promise((done) => child.on("exit", (code, signal) => done(code ?? signal)));
  children.push(child);
  return child;
}

const client = (...options) => execFileSync(path.join(build, "lastscan"), options,
    {encoding: "utf8", stdio: ["ignore", "pipe", "pipe"]});

async function startDaemon() {
  fs.writeFileSync(path.join(work, "lastscan.toml"), `ledger_path = "${work}/ledger.sqlite"
[service]
request_endpoint = "${at}"
broadcast_endpoint = "ipc://${work}/broadcast.sock"
[log]
target = "${work}/lastscand.log"
`);
  const daemon = start("lastscand", "--settings", path.join(work, "lastscan.toml"));
  await until("the daemon answers", 20, () => {
    try {
      return client("runs", "--at", at) || true;
    } catch {
      return false;
    }
  });
  return daemon;
}

async function startPage() {
  const page = start("lastscan", "page", "--listen", "127.0.0.1:0", "--at", at);
  const address = await until("the page says its address", 20,
      () => /http:\/\/[0-9.:]+\//.exec(page.output));
  return {page, address: address[0]};
}

// A request without a browser: {status, headers, text}.
function ask(address, options) {
  return new Promise((done, failed) => {
    const request = http.request(address, options, (answer) => {
      let text = "";
      answer.on("data", (data) => text += data);
      answer.on("end", () => done({status: answer.statusCode, headers: answer.headers, text}));
    });
    request.on("error", failed);
    request.end();
  });
}

function feedHostileSample() {
  const folder = path.join(work, "exports");
  client("rehearse", "--scenario", "strong-sample", "--write", folder);
  const files = fs.readdirSync(path.join(folder, "strong-sample")).sort().slice(0, 3)
      .map((name) => path.join(folder, "strong-sample", name));
  client("feed", ...files, "--run", "hostile/run?&name=x", "--sample", hostile, "--at", at);
}

// What is wrong with the way the page stands on the screen; empty when nothing is.
const layoutTroubles = () => {
  const troubles = [];
  const root = document.documentElement;
  if (root.scrollWidth > root.clientWidth) troubles.push(`scrolls sideways: ${root.scrollWidth}`);
  for (const image of document.images) {
    if (!image.complete || image.naturalWidth === 0) troubles.push(`no picture: ${image.src}`);
    if (!image.alt) troubles.push("a picture without words");
  }
  const ids = Array.from(document.querySelectorAll("[id]"), (element) => element.id);
  if (new Set(ids).size !== ids.length) troubles.push("an id twice");
  if (!document.documentElement.lang) troubles.push("no language");
  if (document.querySelectorAll("h1").length !== 1) troubles.push("not one main heading");
  return troubles;
};

// The least contrast of the text on the page with its ground, by the formula of
// the Web Content Accessibility Guidelines 2.1 (from memory), and whose it is.
const leastContrast = () => {
  const parse = (colour) => colour.match(/[\d.]+/g).map(Number);
  const luminance = (colour) => parse(colour).slice(0, 3)
      .map((part) => part / 255)
      .map((part) => part <= 0.03928 ? part / 12.92 : ((part + 0.055) / 1.055) ** 2.4)
      .reduce((sum, part, index) => sum + part * [0.2126, 0.7152, 0.0722][index], 0);
  const groundOf = (element) => {
    for (let at = element; at; at = at.parentElement) {
      const colour = getComputedStyle(at).backgroundColor;
      if ((parse(colour)[3] ?? 1) > 0) return colour;
    }
    return "rgb(255, 255, 255)";
  };
  let least = {contrast: 21, text: ""};
  for (const element of document.querySelectorAll("body *")) {
    const text = Array.from(element.childNodes)
        .filter((node) => node.nodeType === Node.TEXT_NODE && node.data.trim());
    if (text.length === 0 || element.closest("progress, noscript")) continue;
    const ink = luminance(getComputedStyle(element).color);
    const ground = luminance(groundOf(element));
    const contrast = (Math.max(ink, ground) + 0.05) / (Math.min(ink, ground) + 0.05);
    if (contrast < least.contrast) least = {contrast, text: text[0].data.trim()};
  }
  return least;
};

async function testServer(address) {
  const home = await ask(address, {});
  const policy = home.headers["content-security-policy"] || "";
  check("the policy allows no inline script or style",
      policy.includes("default-src 'none'") && policy.includes("script-src 'self'") &&
      !policy.includes("unsafe"), policy);
  check("a request that writes is refused",
      (await ask(address, {method: "POST"})).status === 405);
  check("another site's name for this address is refused",
      (await ask(address, {headers: {Host: "example.org"}})).status === 421);
  const missing = await ask(`${address}run?name=nobody`, {});
  check("an unknown run is said to be unknown, with cautions",
      missing.status === 404 && missing.text.includes("Cautions") &&
      missing.text.includes("nobody"), missing.status);
  const list = JSON.parse((await ask(`${address}runs.json`, {})).text);
  check("the list as JSON carries cautions",
      list.length > 0 && list.every((advice) => advice.cautions.length > 0));
}

// Watches one open page while rehearsals run; returns the verdicts it showed.
async function followVerdicts(page) {
  await page.evaluate(() => {
    window.openedOnce = true;
    window.shown = new Set();
    const look = () => document.querySelectorAll(".verdict strong")
        .forEach((element) => window.shown.add(element.textContent));
    new MutationObserver(look).observe(document.getElementById("live"),
        {childList: true, subtree: true});
    look();
  });
  // Slow enough that a verdict of the first three looks stands for some seconds.
  const rehearsals = ["strong-sample", "on-course", "needs-more", "hopeless", "lock-lost"]
      .map((name) => start("lastscan", "rehearse", "--scenario", name, "--obey", "--feed",
          "--pace", "1.5", "--at", at));
  try {
    await until("all verdicts were shown", 120, () => page.evaluate(
        (wanted) => wanted.every((word) => window.shown.has(word)), verdicts));
  } catch (error) {
    console.log(error.message);
  }
  rehearsals.forEach((child) => child.kill());
  await Promise.all(rehearsals.map((child) => child.ended));
  return page.evaluate(() => ({shown: Array.from(window.shown), opened: window.openedOnce}));
}

async function testBrowser(context, address, daemon) {
  const page = context.pages()[0] || await context.newPage();
  const complaints = [];
  page.on("console", (message) => {
    if (["error", "warning"].includes(message.type())) complaints.push(message.text());
  });
  page.on("pageerror", (error) => complaints.push(String(error)));

  await page.goto(address);
  const seen = await followVerdicts(page);
  for (const verdict of verdicts) {
    check(`shows "${verdict}" as it comes`, seen.shown.includes(verdict), seen.shown);
  }
  check("updates without loading again", seen.opened === true);
  await until("the hostile name stands on the page", 20,
      () => page.evaluate((name) => document.body.innerText.includes(name), hostile));
  check("shows a hostile name as text", true);

  const pages = [["runs", address]];
  for (const advice of JSON.parse((await ask(`${address}runs.json`, {})).text)) {
    if (advice.sample === hostile || advice.verdict === "EXTEND" || advice.verdict === "INSPECT") {
      const name = advice.sample === hostile ? "hostile" : advice.verdict.toLowerCase();
      pages.push([name, `${address}run?name=${encodeURIComponent(advice.run)}`]);
    }
  }
  check("has pages to look at in depth", pages.length >= 4, pages);
  const screens = [["desk", 1280, 900], ["phone", 390, 844]];
  for (const [screen, width, height] of screens) {
    for (const scheme of ["light", "dark"]) {
      await page.setViewportSize({width, height});
      await page.emulateMedia({colorScheme: scheme});
      for (const [name, url] of pages) {
        await page.goto(url);
        await page.waitForFunction(() => Array.from(document.images).every((i) => i.complete));
        const troubles = await page.evaluate(layoutTroubles);
        check(`${name} stands well on a ${screen}, ${scheme}`, troubles.length === 0, troubles);
        const least = await page.evaluate(leastContrast);
        check(`${name} can be read on a ${screen}, ${scheme}`, least.contrast >= 4.5, least);
        check(`${name} carries the cautions on a ${screen}, ${scheme}`,
            await page.evaluate(() => document.querySelectorAll("footer li").length >= 5));
        await page.screenshot({path: path.join(pictures, `${name}-${screen}-${scheme}.png`),
          fullPage: true});
      }
    }
  }
  const title = await page.title();
  check("a hostile name runs nothing", title !== "owned", title);

  await page.goto(address);
  await page.keyboard.press("Tab");
  check("the first key leads past the header",
      await page.evaluate(() => document.activeElement.className === "skip"));
  await page.focus("article h2 a");
  await page.keyboard.press("Enter");
  await page.waitForURL("**/run?name=*");
  check("a run opens by keyboard", true);

  // The daemon goes and comes back; the open page says so without being loaded anew.
  await page.evaluate(() => window.openedOnce = true);
  daemon.kill("SIGTERM");
  await daemon.ended;
  await page.waitForSelector("#trouble", {timeout: 60000});
  check("says when the daemon is away", true);
  await startDaemon();
  await page.waitForSelector("#trouble", {state: "detached", timeout: 60000});
  check("and when it is back",
      await page.evaluate(() => window.openedOnce === true));
  check("nothing was written to the console", complaints.length === 0, complaints);
}

async function main() {
  fs.mkdirSync(pictures, {recursive: true});
  const daemon = await startDaemon();
  feedHostileSample();
  const {page, address} = await startPage();
  await until("the first runs arrive", 20, async () =>
      JSON.parse((await ask(`${address}runs.json`, {})).text).length > 0);
  await testServer(address);
  const context = await chromium.launchPersistentContext(path.join(work, "profile"), {
    executablePath: "/usr/bin/chromium",
    headless: true,
    args: ["--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
      "--disable-background-networking", "--disable-component-update", "--disable-sync"],
  });
  try {
    await testBrowser(context, address, daemon);
  } finally {
    await context.close();
  }
  page.kill("SIGTERM");
  const code = await Promise.race([page.ended, pause(10).then(() => "it still runs")]);
  check("the page stops cleanly", code === 0, code);
}

main().catch((error) => {
  ++failed;
  console.log(`NOT OK  the test broke off: ${error.stack}`);
}).finally(() => {
  children.forEach((child) => child.kill("SIGKILL"));
  fs.rmSync(work, {recursive: true, force: true});
  console.log(`${passed} passed, ${failed} failed`);
  process.exit(failed > 0 ? 1 : 0);
});
