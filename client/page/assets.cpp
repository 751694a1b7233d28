// The page's script, style sheet and icon. The script only fetches the page
// again when the server says that something changed, and puts the changed parts
// in place; all words and numbers are made by the server.
#include "page/markup.h"

namespace lastscan::page {

std::string_view PageScript() {
  return R"js("use strict";
(() => {
  const live = document.getElementById("live");
  const summary = document.getElementById("summary");
  let stream = null;
  let poll = 0;
  let busy = false;
  let again = false;

  // Puts the children of `fresh` in place of ours; what is the same stays, with
  // its focus and its place on the screen.
  function put(fresh) {
    const focus = document.activeElement;
    const card = focus && focus.closest("#live > [id]");
    const link = focus && focus.getAttribute("href");
    const ours = new Map(Array.from(live.children, (child) => [child.id, child]));
    const next = Array.from(fresh.children, (child) => {
      const old = ours.get(child.id);
      return old && old.outerHTML === child.outerHTML ? old : document.importNode(child, true);
    });
    const same = next.length === live.children.length &&
        next.every((child, at) => child === live.children[at]);
    if (same) return;
    live.replaceChildren(...next);
    if (card && document.activeElement !== focus) {
      const home = document.getElementById(card.id);
      const target = home &&
          Array.from(home.querySelectorAll("a")).find((a) => a.getAttribute("href") === link);
      if (target) target.focus({preventScroll: true});
    }
  }

  async function refresh() {
    if (busy) {
      again = true;
      return;
    }
    busy = true;
    try {
      const answer = await fetch(location.href, {cache: "no-store"});
      const page = new DOMParser().parseFromString(await answer.text(), "text/html");
      const fresh = page.getElementById("live");
      if (fresh) {
        document.title = page.title;
        document.body.dataset.version = page.body.dataset.version;
        const words = page.getElementById("summary").textContent;
        if (summary.textContent !== words) summary.textContent = words;
        put(fresh);
      }
    } catch (error) {
      summary.textContent = "No answer from the page's server. What you see may be old.";
    }
    busy = false;
    if (again) {
      again = false;
      refresh();
    }
  }

  function listen() {
    stream = new EventSource("/events");
    stream.addEventListener("version", (event) => {
      if (event.data !== document.body.dataset.version) refresh();
    });
    stream.addEventListener("error", () => {
      summary.textContent = "No answer from the page's server. What you see may be old.";
      // Closed for good (too many watchers): look again now and then.
      if (stream.readyState === EventSource.CLOSED && !poll) poll = setInterval(refresh, 15000);
    });
    stream.addEventListener("open", refresh);
  }

  // A page that nobody sees need not listen.
  document.addEventListener("visibilitychange", () => {
    if (document.hidden) {
      if (stream) stream.close();
      stream = null;
      clearInterval(poll);
      poll = 0;
    } else if (!stream) {
      listen();
    }
  });
  listen();
})();
)js";
}

std::string_view PageStyle() {
  return R"css(:root {
  color-scheme: light dark;
  --ground: #f4f1e9; --card: #fffdf8; --ink: #22262b; --soft: #555a60; --edge: #8d877a;
  --run: #0b5e7a; --good: #0b5e7a; --plan: #3d4fa1; --hard: #8a3b00; --look: #8c1d5b;
}
@media (prefers-color-scheme: dark) {
  :root {
    --ground: #0d1013; --card: #14181c; --ink: #e6e3da; --soft: #aeb4ba; --edge: #6d747b;
    --run: #6cc5e6; --good: #6cc5e6; --plan: #a9b6ff; --hard: #f0a35e; --look: #ff9ccb;
  }
}
* { box-sizing: border-box; }
body {
  margin: 0 auto; padding: 1rem; max-width: 76rem; background: var(--ground); color: var(--ink);
  font: 1rem/1.45 system-ui, sans-serif; overflow-wrap: anywhere;
}
a { color: var(--run); }
a:focus-visible { outline: 3px solid var(--hard); outline-offset: 2px; }
h1, h2, p, dl, ul { margin: 0 0 .6rem; }
h1 { font-size: 1.5rem; }
h2 { font-size: 1.15rem; }
header { display: flex; flex-wrap: wrap; gap: 0 1.5rem; align-items: baseline; }
.skip { position: absolute; left: -99rem; }
.skip:focus { position: static; }
main { display: grid; gap: 1rem; grid-template-columns: repeat(auto-fill, minmax(min(22rem, 100%), 1fr)); }
main { align-items: start; }
main > section, main > p, main > h2 { grid-column: 1 / -1; }
article, section, #trouble {
  background: var(--card); border: 1px solid var(--edge); border-radius: .4rem; padding: .9rem 1rem;
}
#trouble { border-width: 3px; border-color: var(--look); }
.run { border-left: .6rem solid var(--edge); }
.verdict { font-size: 1.1rem; }
.verdict strong {
  display: inline-block; padding: .1rem .6rem; margin-right: .4rem; border: 2px solid currentColor;
  border-radius: .3rem; text-transform: uppercase; letter-spacing: .04em;
}
.verdict-enough { border-left-color: var(--good); }
.verdict-enough .verdict strong { background: var(--good); color: var(--card); border-color: var(--good); }
.verdict-on-course { border-left: .6rem double var(--good); }
.verdict-on-course .verdict strong { color: var(--good); }
.verdict-extend { border-left: .6rem dashed var(--plan); }
.verdict-extend .verdict strong { color: var(--plan); border-style: dashed; }
.verdict-out-of-reach { border-left: .6rem dotted var(--hard); }
.verdict-out-of-reach .verdict strong { color: var(--hard); border-style: dotted; }
.verdict-inspect { border: 3px solid var(--look); border-left-width: .6rem; }
.verdict-inspect .verdict strong { background: var(--look); color: var(--card); border-color: var(--look); }
.where, .key, footer { color: var(--soft); font-size: .92rem; }
dl { display: grid; grid-template-columns: minmax(0, max-content) minmax(60%, 1fr); gap: .1rem 1rem; }
dl div { display: contents; }
dt { color: var(--soft); }
dd { margin: 0; font-variant-numeric: tabular-nums; }
progress { width: 100%; height: .8rem; accent-color: var(--run); display: block; }
.findings { padding-left: 1.1rem; }
.severity-3 strong { color: var(--look); }
.severity-2 strong { color: var(--hard); }
picture img { width: 100%; height: auto; display: block; max-width: 60rem; }
.table { overflow-x: auto; }
table { border-collapse: collapse; font-variant-numeric: tabular-nums; overflow-wrap: normal; }
td, th[scope="row"] { white-space: nowrap; }
th, td { text-align: left; padding: .25rem 1rem .25rem 0; border-bottom: 1px solid var(--edge); }
footer { margin-top: 1.5rem; border-top: 1px solid var(--edge); padding-top: .8rem; }
@media (max-width: 40rem) { body { padding: .6rem; } }
)css";
}

std::string_view PageIcon() {
  return R"svg(<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 16 16"><rect width="16" height="16" rx="3" fill="#0b5e7a"/><path d="M2 13 11 4" stroke="#fffdf8" stroke-width="1.6"/><path d="M2 7h12" stroke="#f0a35e" stroke-width="1.4" stroke-dasharray="3 1.5"/><circle cx="8" cy="7" r="1.8" fill="#fffdf8"/></svg>
)svg";
}

}  // namespace lastscan::page
