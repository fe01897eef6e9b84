/* The buttons and fields of the Data page: keep or discard what was read, take files out of view and
   back, correct what a series is. The server answers each; the page then asks for itself anew. */
(function () {
  "use strict";
  const pricewake = window.pricewake;
  const { say, props } = pricewake.intake;
  const byId = (id) => document.getElementById(id);
  let tokens = [];

  async function post(address, body) {
    try {
      const answer = await fetch(address, {
        method: "POST",
        headers: { "Content-Type": "application/json" },
        body: JSON.stringify(body),
      });
      const data = await answer.json();
      return answer.ok ? data : { message: "this could not be done", ...data };
    } catch (_) {
      return { message: "The program does not answer; is Pricewake still running?" };
    }
  }

  const refresh = () => props("data-tick", { data: Date.now() });

  function show() {
    props("data-pending", { data: [...tokens] });
  }

  /* Put the focus where the next step is, once the page has drawn it. */
  function focus(id, tries = 60) {
    const place = byId(id);
    if (place) place.focus({ preventScroll: false });
    else if (tries) setTimeout(() => focus(id, tries - 1), 50);
  }

  /* Links of the other pages name a pair that may be gone once other files are in view. */
  function forgetPairs() {
    const day = new URLSearchParams(location.search).get("as_of");
    for (const link of document.querySelectorAll("[id^='nav-']")) {
      const path = new URL(link.href).pathname;
      if (path !== location.pathname) props(link.id, { href: day ? `${path}?as_of=${day}` : path });
    }
  }

  async function keep() {
    const field = byId("stands-from");
    const answer = await post("/intake/keep", { tokens, day: field ? field.value : "" });
    const kept = answer.kept || [];
    const lines = kept.map((each) => ({ text: `${each.file}: ${each.series.length} series kept.`, done: "kept" }));
    if (answer.message) lines.push({ text: answer.message, bad: true });
    say(lines);
    tokens = answer.left || tokens;
    show();
    forgetPairs();
    refresh();
    focus("field-files");
  }

  async function discard(gone) {
    await post("/intake/discard", { tokens: gone });
    tokens = tokens.filter((token) => !gone.includes(token));
    say([{ text: gone.length > 1 || !tokens.length ? "Discarded; nothing was kept." : "Discarded." }]);
    show();
    focus(tokens.length ? "data-preview-head" : "field-files");
  }

  async function change(act, body) {
    const answer = await post(`/workspace/${act}`, body);
    if (answer.message) say([{ text: answer.message, bad: true }]);
    if (act !== "correct") forgetPairs();
    refresh();
    return !answer.message;
  }

  document.addEventListener("click", (event) => {
    const button = event.target.closest && event.target.closest("[data-act]");
    if (!button) return;
    const { act, file, token } = button.dataset;
    if (act === "keep") keep();
    else if (act === "discard") discard([token]);
    else if (act === "discard-all") discard([...tokens]);
    else change(act, { file });
  });

  /* A button that sets a field of the state shows it in the field, too. */
  document.addEventListener("click", (event) => {
    const button = event.target.closest && event.target.closest(".data-page [data-set]");
    const field = button && pricewake.controls.field(button.dataset.set);
    if (field) field.value = button.dataset.value;
  });

  document.addEventListener("change", async ({ target }) => {
    const { sheet: token, value } = target.dataset || {};
    if (!token || target.value === value) return;
    const chosen = target.value;
    const answer = await post("/intake/sheet", { token, sheet: chosen });
    if (answer.message) {
      say([{ text: answer.message, bad: true }]);
      target.value = value;
    } else say([{ text: `${answer.file}: ${answer.series.length} series read; nothing is kept yet.` }]);
    show();
  });

  document.addEventListener("change", async (event) => {
    const { correct, series, value } = event.target.dataset || {};
    if (!correct || event.target.value === value) return;
    const done = await change("correct", { series, field: correct, value: event.target.value });
    if (done) say([{ text: `${series}: ${correct} is "${event.target.value}" from now on, and in every later file.` }]);
    else event.target.value = value;
  });

  /* Native fields where Python asked for one; they follow what the page says of them. */
  function build(holder) {
    const { entry, name, value, label, placeholder, correct, series } = holder.dataset;
    const made = JSON.stringify([entry, name, value, series]);
    if (holder.made === made && holder.firstChild) return;
    holder.made = made;
    const input = document.createElement("input");
    input.type = entry;
    if (name) input.id = name;
    input.value = value || "";
    input.setAttribute("aria-label", label);
    if (placeholder) input.placeholder = placeholder;
    if (correct) Object.assign(input.dataset, { correct, series, value: value || "" });
    holder.replaceChildren(input);
  }

  new MutationObserver((changes) => {
    for (const holder of document.querySelectorAll("[data-entry]")) build(holder);
    for (const { type, target } of changes) {
      if (type === "attributes" && target.tagName === "SELECT") target.value = target.dataset.value;
    }
    /* The page was opened anew while files were waiting: show them again. */
    if (byId("data-preview") && !byId("data-preview").seen) {
      byId("data-preview").seen = true;
      if (tokens.length) setTimeout(show, 0);
    }
  }).observe(document.documentElement, {
    childList: true, subtree: true, attributes: true, attributeFilter: ["data-value", "data-series"],
  });

  pricewake.pending = {
    add(more) {
      tokens.push(...more);
      show();
      focus("data-preview-head");
    },
  };
})();
