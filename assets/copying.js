/* Copy a number or the link of the view; said politely, with a way for browsers that refuse. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  let timer = 0;

  function say(text) {
    const toast = document.getElementById("toast");
    if (!toast) return;
    toast.textContent = text;
    clearTimeout(timer);
    timer = setTimeout(() => { toast.textContent = ""; }, 4000);
  }

  /* Without a clipboard of its own the browser may still copy what is selected. */
  function selected(text) {
    const area = document.createElement("textarea");
    const before = document.activeElement;
    area.value = text;
    area.setAttribute("readonly", "");
    area.className = "hidden-label";
    document.body.append(area);
    area.select();
    let done = false;
    try { done = document.execCommand("copy"); } catch (_) { /* said below */ }
    area.remove();
    if (before && before.focus) before.focus({ preventScroll: true });
    return done;
  }

  async function copy(text, what) {
    let done = false;
    try {
      await navigator.clipboard.writeText(text);
      done = true;
    } catch (_) {
      done = selected(text);
    }
    say(done ? `Copied ${what}.` : `The browser does not let pages copy. Here it is: ${text}`);
    return done;
  }

  document.addEventListener("click", (event) => {
    const at = (selector) => event.target.closest && event.target.closest(selector);
    if (event.target.id === "copy-link") copy(location.href, "the link to this view");
    const given = at("[data-copy]"), live = at("[data-copy-number]");
    if (given) copy(given.dataset.copy, `${given.dataset.copied} ${given.dataset.copy}`);
    if (live && pricewake.lag && pricewake.lag.cell) {
      const name = live.dataset.copyNumber, number = String(pricewake.lag.cell[name]);
      copy(number, `the ${name} ${number}`);
    }
  });

  pricewake.copying = { copy, say };
})();
