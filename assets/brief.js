/* The Brief page: the list of parts, the preview and the files. The draft is kept in this browser,
   so that closing the page loses nothing; app/brief/routes.py makes the brief from it. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const DRAFT = "pricewake-brief", ADDED = "pricewake-brief-added", WAIT = 500;
  const page = { offer: null, draft: null, recipe: "", turn: 0, timer: 0, shown: "", making: false };
  const byId = (id) => document.getElementById(id);

  function kept(name) {
    try { return JSON.parse(localStorage.getItem(name)); } catch (_) { return null; }
  }
  function keep(name, value) {
    try { localStorage.setItem(name, JSON.stringify(value)); } catch (_) { /* a locked-down browser */ }
  }
  function element(tag, attributes = {}, ...children) {
    const made = document.createElement(tag);
    for (const [name, value] of Object.entries(attributes)) {
      if (name in made && name !== "list") made[name] = value; else made.setAttribute(name, value);
    }
    made.append(...children);
    return made;
  }
  const button = (words, act, label) =>
    element("button", { type: "button", onclick: act, "aria-label": label || words }, words);

  const message = (text) => { if (byId("brief-message")) byId("brief-message").textContent = text || ""; };

  /* A view of another page, put into the brief by its button there. */
  document.addEventListener("click", (event) => {
    const chosen = event.target.closest && event.target.closest("[data-brief]");
    if (!chosen) return;
    const name = location.pathname === "/" ? "lag" : location.pathname.slice(1);
    const added = kept(ADDED) || [];
    added.push({ kind: "view", page: name, view: chosen.dataset.brief, state: location.search.slice(1) });
    keep(ADDED, added);
    toast("Put into the brief.");
  });

  function toast(words) {
    const place = byId("toast");
    if (!place) return;
    place.textContent = words;
    clearTimeout(toast.timer);
    toast.timer = setTimeout(() => { place.textContent = ""; }, 4000);
  }

  function place(part) {
    const { parts } = page.draft;
    let at = parts.length;
    for (let i = parts.length - 1; i >= 0; i -= 1) if (parts[i].page === part.page) { at = i + 1; break; }
    parts.splice(at, 0, part);
  }

  function takeAdded() {
    const added = (kept(ADDED) || []).filter((part) => (page.offer.pages[part.page] || { views: {} }).views[part.view]);
    if (!added.length) return;
    added.forEach(place);
    keep(ADDED, []);
  }

  /* What the server sent: {pages, usual, message, longest}. */
  function adopt(offer) {
    if (!offer || !byId("brief-parts")) return window.dash_clientside.no_update;
    const saved = kept(DRAFT);
    Object.assign(page, { offer, shown: "" });
    page.draft = saved && saved.draft && saved.draft.parts ? saved.draft : structuredClone(offer.usual.full);
    page.recipe = (saved && saved.recipe) || "";
    page.paper = (saved && saved.paper) || "a4";
    takeAdded();
    message(offer.message);
    tools();
    list();
    changed(0);
    return window.dash_clientside.no_update;
  }

  function tools() {
    const title = element("input", { type: "text", id: "brief-title-field", value: page.draft.title, maxLength: page.offer.longest.title, placeholder: "made from the print" });
    title.addEventListener("input", () => { page.draft.title = title.value; changed(); });
    const described = "help-brief-title-field";
    title.setAttribute("aria-describedby", described);
    const help = element("button", { type: "button", className: "help", "aria-label": "Help on Title", "data-help": described, "aria-describedby": described }, "?");
    byId("brief-title").replaceChildren(
      element("span", { className: "label" }, element("label", { htmlFor: title.id }, "Title"), help), title,
      element("span", { id: described, className: "hidden-label" }, "Heading of the brief; empty makes one from the newest print."));
    byId("brief-form").value = page.draft.form;
    byId("brief-paper").value = page.paper;
    const file = element("input", { type: "file", id: "brief-recipe-file", accept: ".toml", className: "hidden-label", "aria-label": "Recipe file" });
    file.addEventListener("change", () => { if (file.files[0]) open(file.files[0]); file.value = ""; });
    const parts = [button("Open a recipe", () => file.click()), file];
    file.tabIndex = -1;
    if (page.recipe) parts.push(button("Do not compare with it", () => { page.recipe = ""; tools(); changed(0); }));
    byId("brief-recipe").replaceChildren(...parts);
  }

  async function open(file) {
    const answer = await post("/brief/recipe", file);
    if (!answer.draft) return message(answer.message);
    page.draft = answer.draft;
    page.recipe = await file.text();
    tools();
    list();
    changed(0);
    message(answer.message);
  }

  /* The list ------------------------------------------------------------------------------- */

  function named(part) {
    const known = page.offer.pages[part.page];
    if (part.kind === "words") return "Words";
    if (!known) return `${part.page}: not there`;
    return part.kind === "verdict" ? `${known.title}: headline and verdict` : `${known.title}: ${known.views[part.view] || part.view}`;
  }

  function move(from, to) {
    const [part] = page.draft.parts.splice(from, 1);
    page.draft.parts.splice(to, 0, part);
    list();
    const at = byId("brief-parts").children[to];
    const arrow = at && (at.querySelector(from > to ? ".up" : ".down"));
    if (arrow && !arrow.disabled) arrow.focus(); else if (at) at.querySelector("button:not(:disabled)").focus();
    changed();
  }

  function item(part, index) {
    const before = page.draft.parts.slice(0, index).reverse().find((one) => one.kind !== "words");
    const whole = named(part);
    const name = part.kind === "view" && before && before.page === part.page ? whole.slice(whole.indexOf(": ") + 2) : whole;
    const last = page.draft.parts.length - 1;
    const up = button("↑", () => move(index, index - 1), `Move ${name} up`);
    const down = button("↓", () => move(index, index + 1), `Move ${name} down`);
    Object.assign(up, { disabled: index === 0, className: "up" });
    Object.assign(down, { disabled: index === last, className: "down" });
    const known = page.offer.pages[part.page];
    const title = part.kind === "words" || !known ? element("span", { className: "part-name" }, name)
      : element("a", { className: "part-name", href: `${known.path}${part.state ? `?${part.state}` : ""}`, title: "Open this view on its page" }, name);
    const acts = element("span", { className: "part-acts" }, up, down,
      button("Add words", () => { page.draft.parts.splice(index + 1, 0, { kind: "words", words: "" }); list(); byId(`brief-words-${index + 1}`).focus(); }, `Add words below ${name}`),
      button("Remove", () => { page.draft.parts.splice(index, 1); list(); changed(); }, `Remove ${name}`));
    const row = element("li", { className: `part ${part.kind}` }, element("div", { className: "part-line" }, title, acts));
    if (part.kind === "words") {
      const words = element("textarea", { id: `brief-words-${index}`, value: part.words, rows: 4, maxLength: page.offer.longest.words, "aria-label": "Words, in Markdown", placeholder: "Words, in Markdown: **bold**, *slanted*, - list" });
      words.addEventListener("input", () => { part.words = words.value; changed(); });
      row.append(words);
    }
    return row;
  }

  function list() {
    byId("brief-parts").replaceChildren(...page.draft.parts.map(item));
    const choice = element("select", { id: "brief-view", "aria-label": "View to add" });
    for (const [name, known] of Object.entries(page.offer.pages)) {
      const group = element("optgroup", { label: known.title });
      group.append(element("option", { value: JSON.stringify([name, ""]) }, `${known.title}: headline and verdict`));
      for (const [view, words] of Object.entries(known.views)) group.append(element("option", { value: JSON.stringify([name, view]) }, words));
      choice.append(group);
    }
    byId("brief-add").replaceChildren(choice,
      button("Add view", () => {
        const [name, view] = JSON.parse(choice.value);
        const like = page.draft.parts.find((part) => part.page === name);
        const state = like ? like.state : page.offer.pages[name].state;
        place(view ? { kind: "view", page: name, view, state } : { kind: "verdict", page: name, state });
        list();
        changed(0);
      }),
      button("Add words at the end", () => { page.draft.parts.push({ kind: "words", words: "" }); list(); byId("brief-parts").lastChild.querySelector("textarea").focus(); }));
  }

  /* Making it ------------------------------------------------------------------------------ */

  async function post(address, body) {
    try {
      const json = !(body instanceof Blob);
      const answer = await fetch(address, { method: "POST", body: json ? JSON.stringify(body || {}) : body, headers: { "Content-Type": json ? "application/json" : "text/plain" } });
      return await answer.json();
    } catch (_) {
      return { message: "The program does not answer; is it still running?" };
    }
  }

  function say(words, done, total) {
    if (!byId("brief-work")) return;
    byId("brief-work").hidden = words === null;
    if (words === null) return;
    byId("brief-progress-words").textContent = words;
    Object.assign(byId("brief-progress"), { max: total || 1, value: done || 0 });
  }

  function changed(wait = WAIT) {
    keep(DRAFT, { draft: page.draft, recipe: page.recipe, paper: page.paper });
    clearTimeout(page.timer);
    page.timer = setTimeout(look, wait);
  }

  /* Take a brief through its steps; null when another has begun or it is refused. */
  async function make(files) {
    const turn = (page.turn += 1);
    page.making = true;
    try {
      const begun = await post("/brief/draft", { draft: page.draft, recipe: page.recipe, paper: page.paper, files });
      if (!begun.token) { if (turn === page.turn) message(begun.message); return null; }
      let at = { done: 0, total: begun.total, coming: "Working it out" };
      while (at.coming) {
        if (turn !== page.turn || !byId("brief-parts")) { post(`/brief/drop/${begun.token}`); return null; }
        say(`${at.coming}, ${at.done} of ${at.total}`, at.done, at.total);
        at = await post(`/brief/step/${begun.token}`);
        if (at.message) { if (turn === page.turn) message(at.message); return null; }
      }
      if (turn !== page.turn) return null;
      message((at.said || []).map((text) => `${text[0].toUpperCase()}${text.slice(1)}.`).join(" "));
      return { token: begun.token, title: at.title };
    } finally {
      if (turn === page.turn) { page.making = false; say(null); }
    }
  }

  async function look() {
    page.timer = 0;
    if (!byId("brief-preview")) return;
    const made = await make(false);
    if (!made || !byId("brief-preview")) return;
    const frame = byId("brief-preview");
    let above = 0;
    try { above = frame.contentWindow.scrollY; } catch (_) { /* nothing there yet */ }
    frame.onload = () => { frame.contentWindow.scrollTo(0, above); page.shown = made.token; };
    frame.src = `/brief/preview/${made.token}.html`;
  }

  async function save(kind) {
    clearTimeout(page.timer);
    const made = await make(kind === "zip");
    if (!made) return;
    const link = element("a", { href: `/brief/files/${made.token}.${kind}?name=${encodeURIComponent(made.title)}`, download: "" });
    document.body.append(link);
    link.click();
    link.remove();
    toast(kind === "zip" ? "All files saved in one archive." : "The page is saved.");
  }

  document.addEventListener("click", (event) => {
    if (!byId("brief-parts") || !page.draft) return;
    const act = event.target.id;
    if (act === "brief-save") save("zip");
    if (act === "brief-save-page") save("html");
    if (act === "brief-stop") { page.turn += 1; page.making = false; say(null); message("Stopped. The parts are kept."); }
    if (act === "brief-usual") {
      if (page.draft.parts.some((part) => part.words) && !window.confirm("Give up the words that were written?")) return;
      page.draft = structuredClone(page.offer.usual[page.draft.form]);
      page.recipe = "";
      tools();
      list();
      changed(0);
    }
  });
  document.addEventListener("change", (event) => {
    if (!byId("brief-parts") || !page.draft) return;
    if (event.target.id === "brief-form") {
      const usual = (form) => JSON.stringify(page.offer.usual[form].parts);
      const untouched = JSON.stringify(page.draft.parts) === usual(page.draft.form);
      page.draft.form = event.target.value;
      if (untouched) page.draft.parts = structuredClone(page.offer.usual[page.draft.form].parts);
      list();
      changed(0);
    }
    if (event.target.id === "brief-paper") { page.paper = event.target.value; changed(0); }
  });

  window.dash_clientside = Object.assign({}, window.dash_clientside, { brief: { adopt } });
  pricewake.brief = Object.assign(page, { busy: () => Boolean(page.timer || page.making) });
})();
