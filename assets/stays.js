/* An answer puts new elements in place of the old ones; the focus and the open folds stay. */
(function () {
  "use strict";
  let focused = null;
  const open = new Set();

  /* The part of the page that an element lies in, and its place among its like there. */
  function placeOf(element, like) {
    const part = element.parentElement.closest("[id]");
    return [part, [...part.querySelectorAll(like)].indexOf(element)];
  }

  function described(element) {
    const { id, dataset: { correct, series, act: name, file, sheet, set } } = element;
    if (id) return () => document.getElementById(id);
    const by = (selector) => () => document.querySelector(`[data-page] ${selector}`);
    if (correct) return by(`[data-correct="${correct}"][data-series="${CSS.escape(series)}"]:not([data-entry])`);
    if (sheet) return by(`[data-sheet="${CSS.escape(sheet)}"]`);
    if (name && file) return by(`[data-act="${name}"][data-file="${CSS.escape(file)}"]`);
    if (!set && !element.closest(".lag-page")) return null; // there the answer has the same parts again
    const like = set ? `[data-set="${set}"]` : element.tagName;
    const [part, place] = placeOf(element, like);
    return () => document.querySelectorAll(`#${CSS.escape(part.id)} ${like}`)[place];
  }

  function foldName(fold) {
    if (fold.dataset.stays || fold.id) return fold.dataset.stays || fold.id;
    const [part, place] = placeOf(fold, "details");
    return `${part.id} ${place}`;
  }

  document.addEventListener("focusin", ({ target }) => {
    focused = target.closest("[data-page], .lag-page") ? { target, again: described(target) } : null;
  });
  document.addEventListener("focusout", ({ target }) => setTimeout(() => {
    if (focused && focused.target === target && target.isConnected && document.activeElement !== target) focused = null;
  }, 0));
  document.addEventListener("toggle", ({ target }) => {
    if (target.tagName !== "DETAILS" || !target.isConnected || !target.closest("[data-page]")) return;
    open[target.open ? "add" : "delete"](foldName(target));
  }, true);

  new MutationObserver(() => {
    for (const fold of document.querySelectorAll("[data-page] details")) {
      if (fold.seen) continue;
      fold.seen = true;
      if (open.has(foldName(fold))) fold.open = true;
    }
    if (!focused || focused.target.isConnected || !focused.again) return;
    if (document.activeElement && document.activeElement !== document.body) return;
    const again = focused.again();
    if (again) again.focus({ preventScroll: true });
  }).observe(document.documentElement, { childList: true, subtree: true });
})();
