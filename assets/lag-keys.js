/* Keys of the Lag page that work anywhere outside a text field, pinning, folding. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const byId = (id) => document.getElementById(id);
  const TYPED = "input:not([type=range]):not([type=checkbox]), select, textarea, [contenteditable]";
  const PRESSED = "button, summary, a[href]";

  function pin(what) {
    const page = pricewake.lag, { state, data } = page;
    if (!state || data.error) return;
    if (what === "swap") {
      const [window, shift] = state.pinned.split(":").map(Number);
      page.state = { ...state, pinned: `${state.window}:${state.shift}` };
      page.move({ window, shift });
      return;
    }
    const pinned = what === "chosen" ? `${state.window}:${state.shift}` : "";
    page.put({ pinned });
    page.layOver(page.known);
    pricewake.copying.say(pinned ? "Pinned. “Two cells side by side” below compares it with the chosen one." : "The pin is out.");
  }

  function leaveOutResponse(name) {
    const { state } = pricewake.lag;
    const listed = state.other_responses.split("|").filter(Boolean);
    const now = listed.includes(name) ? listed.filter((each) => each !== name) : [...listed, name];
    pricewake.lag.put({ other_responses: now.join("|") });
  }

  document.addEventListener("change", ({ target }) => {
    if (!target.dataset || !target.dataset.addResponse || !target.value) return;
    pricewake.lag.refocus = ".folds [data-add-response]";
    leaveOutResponse(target.value);
  });

  document.addEventListener("keydown", (event) => {
    if (!byId("lag-sentence") || !pricewake.lag.state || event.altKey || event.metaKey) return;
    const typed = event.target.matches && event.target.matches(TYPED);
    const key = event.key.toLowerCase();
    if (event.ctrlKey) {
      if (typed || (key !== "z" && key !== "y")) return;
      event.preventDefault();
      if (key === "y" || event.shiftKey) pricewake.trail.forward(); else pricewake.trail.back();
      return;
    }
    if (byId("keys").open) return;
    if (key === "escape") {
      if (!pricewake.player.stop()) pricewake.lagTime.drop();
      return;
    }
    if (typed) return;
    if (key === "p") pin("chosen");
    const pressed = event.target.closest && event.target.closest(PRESSED);
    if (event.key === " " && !pressed && byId("tool-player").open) {
      event.preventDefault(); // the page would scroll
      pricewake.player.toggle();
    }
  });

  document.addEventListener("click", (event) => {
    const at = (selector) => event.target.closest && event.target.closest(selector);
    for (const name of ["pin", "response", "without"]) {
      const button = at(`.folds [data-${name}]`); // it is made anew with the answer
      if (button) pricewake.lag.refocus = `.folds [data-${name}="${CSS.escape(button.dataset[name])}"]`;
    }
    if (at("[data-pin]")) pin(at("[data-pin]").dataset.pin);
    if (at("[data-response]")) leaveOutResponse(at("[data-response]").dataset.response);
  });
})();
