/* Tables and long lists of names, built from one attribute that the server writes
   (app/pages/tables.py): a script makes a thousand rows while the renderer makes thirty. Only text
   and attributes are set, never markup. A new answer changes the cells that differ and leaves the
   others, so that the focus and a half-typed unit stay. */
(function () {
  "use strict";
  const kept = new Map(); // what was looked for, and the page of the table, by the table's label
  const shown = new Map(); // the newest holder of a table, by the same label
  let focused = null; // the element in a table that has the focus, or had it when it was taken away
  const SOON = 150; // milliseconds after the last letter
  const isElement = (spec) => Array.isArray(spec);
  const same = (one, other) => JSON.stringify(one) === JSON.stringify(other);

  function made(tag, attributes, ...children) {
    const element = document.createElement(tag);
    for (const [name, value] of Object.entries(attributes)) {
      if (name.startsWith("on")) continue;
      if (name === "style") {
        for (const [key, text] of Object.entries(value)) {
          if (key.startsWith("--")) element.style.setProperty(key, text);
          else element.style[key] = text;
        }
      } else element.setAttribute(name, value === true ? "" : value);
    }
    element.append(...children.map(built));
    return element;
  }

  const built = (spec) => (isElement(spec) ? made(...spec) : document.createTextNode(spec));

  /* Bring an element from what it was built of to what it is to be. */
  function changed(node, before, after) {
    if (same(before, after)) return;
    const alike = isElement(before) && isElement(after) && before[0] === after[0] && same(before[1], after[1]);
    if (!alike || before[0] === "select") return node.replaceWith(built(after));
    const [old, now] = [before.slice(2), after.slice(2)], nodes = [...node.childNodes];
    now.forEach((spec, place) => {
      if (place < old.length) changed(nodes[place], old[place], spec);
      else node.append(built(spec));
    });
    for (const gone of nodes.slice(now.length, old.length)) gone.remove();
  }

  /* The words and buttons of a table of several pages. */
  function bar(holder, place) {
    const attributes = place === "top" ? {} : { "data-foot": true };
    const parts = [
      ["span", { class: "page-words", ...(place === "top" ? { role: "status" } : {}) }],
      ["button", { type: "button", "data-turn": "-1" }, "Previous"],
      ["button", { type: "button", "data-turn": "1" }, "Next"],
    ];
    if (place === "top") {
      const noun = holder.spec[1]["data-noun"];
      parts.unshift(["label", {}, ["span", {}, `Find ${noun}`], ["input", { type: "search", "data-find": true, "aria-label": `Find ${noun}: ${holder.spec[1]["aria-label"]}`, autocomplete: "off", spellcheck: "false" }]]);
    }
    return made("div", { class: "page-bar", ...attributes }, ...parts);
  }

  function tell(holder, words) {
    const { "data-total": total, "data-found": found = total, "data-at": at = 1, "data-pages": pages = 1, "data-rows": rows } = holder.spec[1];
    const { find } = kept.get(nameOf(holder));
    const first = (at - 1) * rows + 1, last = Math.min(found, at * rows);
    const range = Number(found) ? `${first} to ${last} of ${found}` : "none";
    const text = words || (find ? `${range} found, ${total} in all` : range);
    for (const place of holder.querySelectorAll(".page-words")) if (place.textContent !== text) place.textContent = text;
    holder.querySelector("[data-foot]").hidden = Number(pages) < 2;
    for (const button of holder.querySelectorAll("[data-turn]")) {
      const there = Number(at) + Number(button.dataset.turn);
      button.setAttribute("aria-disabled", String(there < 1 || there > Number(pages)));
      button.hidden = Number(pages) < 2;
    }
  }

  const nameOf = (holder, spec = holder.spec) => spec[1]["aria-label"] || holder.closest("[id]").id;

  function show(holder, spec) {
    const table = holder.querySelector("table");
    const before = holder.spec;
    holder.spec = spec;
    if (!table) holder.replaceChildren(built(spec));
    else if (same(before[1], spec[1])) changed(table, before, spec);
    else {
      /* The attributes of the table itself are few; its rows are kept. */
      for (const name of Object.keys(before[1])) if (!(name in spec[1])) table.removeAttribute(name);
      for (const [name, value] of Object.entries(spec[1])) if (name !== "style") table.setAttribute(name, value);
      changed(table, [before[0], spec[1], ...before.slice(2)], spec);
    }
    const many = "data-address" in spec[1];
    const top = holder.querySelector(".page-bar");
    if (!many) {
      for (const each of holder.querySelectorAll(".page-bar")) each.remove();
      return;
    }
    const name = nameOf(holder);
    if (!kept.has(name)) kept.set(name, { find: "", at: 1 });
    if (!top) {
      holder.prepend(bar(holder, "top"));
      holder.append(bar(holder, "foot"));
      holder.querySelector("[data-find]").value = kept.get(name).find;
    }
    tell(holder);
  }

  /* Ask for the page that was looked at; the newest question wins. */
  async function ask(holder) {
    const wanted = kept.get(nameOf(holder)), asked = (holder.asked = (holder.asked || 0) + 1);
    const [path, query] = holder.spec[1]["data-address"].split("?");
    const address = new URLSearchParams(query);
    address.set("find", wanted.find);
    address.set("at", wanted.at);
    let spec = null;
    try {
      const answer = await fetch(`${path}?${address}`);
      spec = answer.ok ? (await answer.json()).table : null;
    } catch (_) { /* told below */ }
    if (holder.asked !== asked || !holder.isConnected) return;
    if (!spec) return tell(holder, "The program does not answer; is Pricewake still running?");
    wanted.at = Number(spec[1]["data-at"]);
    show(holder, spec);
  }

  /* The renderer makes a new holder with every answer: what was built moves over, focus and all. */
  function moveIn(holder, spec) {
    const name = nameOf(holder, spec), before = shown.get(name);
    if (before && before !== holder && !before.isConnected) {
      holder.spec = before.spec;
      holder.replaceChildren(...before.childNodes);
    }
    shown.set(name, holder);
  }

  function take(holder) {
    const text = holder.dataset.built;
    if (holder.text === text) return;
    holder.text = text;
    const spec = JSON.parse(text);
    moveIn(holder, spec);
    holder.asked = (holder.asked || 0) + 1;
    const wanted = "data-address" in spec[1] && kept.get(spec[1]["aria-label"]);
    if (!wanted || (!wanted.find && wanted.at === 1)) return show(holder, spec);
    if (holder.spec) holder.spec = [holder.spec[0], { ...holder.spec[1], "data-address": spec[1]["data-address"] }, ...holder.spec.slice(2)];
    else show(holder, spec);
    ask(holder);
  }

  /* Names to choose from: the drop-down's own, or those of a list of the page once it is shown. */
  function fill(select) {
    const { options, before = "", except, value } = select.dataset;
    if (select.hidden) return;
    const list = options.startsWith("#") ? document.querySelector(options) : null;
    const text = list ? list.dataset.names : options;
    if (!text || select.filled === text || text.startsWith("#")) return;
    select.filled = text;
    const chosen = value === undefined ? select.value : value;
    const pairs = JSON.parse(text).map((each) => (list ? [each, each] : each));
    select.replaceChildren(...pairs.filter(([name]) => name !== except || !list).map(([name, words]) => {
      const option = document.createElement("option");
      Object.assign(option, { value: name, textContent: `${before}${words}` });
      return option;
    }));
    if (chosen) select.value = chosen;
  }

  function look() {
    for (const holder of document.querySelectorAll("[data-built]")) take(holder);
    for (const [name, holder] of shown) if (!holder.isConnected) shown.delete(name);
    for (const select of document.querySelectorAll("select[data-options]")) fill(select);
    if (focused && focused.isConnected && document.activeElement === document.body) focused.focus({ preventScroll: true });
  }

  document.addEventListener("focusin", ({ target }) => { focused = target.closest("[data-built]") ? target : null; });
  document.addEventListener("focusout", ({ target }) => setTimeout(() => {
    if (focused === target && target.isConnected && document.activeElement !== target) focused = null;
  }, 0));

  new MutationObserver(look).observe(document.documentElement, {
    childList: true, subtree: true, attributes: true, attributeFilter: ["data-built", "data-options", "data-names", "hidden"],
  });

  let timer = 0;
  document.addEventListener("input", ({ target }) => {
    if (!target.matches || !target.matches("[data-find]")) return;
    const holder = target.closest("[data-built]");
    Object.assign(kept.get(nameOf(holder)), { find: target.value.trim(), at: 1 });
    clearTimeout(timer);
    timer = setTimeout(() => ask(holder), SOON);
  });

  /* A link to another page of the program, followed as the renderer's own are. */
  document.addEventListener("click", (event) => {
    const link = event.target.closest && event.target.closest("[data-built] a[data-route]");
    if (!link || event.button || event.ctrlKey || event.metaKey || event.shiftKey || event.altKey) return;
    event.preventDefault();
    history.pushState({}, "", link.getAttribute("href"));
    window.dispatchEvent(new CustomEvent("_dashprivate_pushstate"));
    window.scrollTo(0, 0);
  });

  document.addEventListener("click", async (event) => {
    const button = event.target.closest && event.target.closest("[data-turn]");
    if (!button || button.getAttribute("aria-disabled") === "true") return;
    const holder = button.closest("[data-built]");
    kept.get(nameOf(holder)).at = Number(holder.spec[1]["data-at"]) + Number(button.dataset.turn);
    await ask(holder);
    if (!button.closest("[data-foot]")) return;
    holder.scrollIntoView({ block: "start" });
    holder.querySelector(`.page-bar [data-turn="${button.dataset.turn}"]`).focus({ preventScroll: true });
  });
})();
