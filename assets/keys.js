/* The list of keys, on every page: "?" or the button in the bar opens it (app/keys.py). */
(function () {
  "use strict";
  const TYPED = "input:not([type=range]):not([type=checkbox]), select, textarea, [contenteditable]";
  const list = () => document.getElementById("keys");

  function show() {
    if (list() && !list().open) list().showModal();
  }

  document.addEventListener("keydown", (event) => {
    if (event.key !== "?" || event.ctrlKey || event.altKey || event.metaKey || event.target.matches?.(TYPED)) return;
    event.preventDefault();
    show();
  });

  document.addEventListener("click", ({ target }) => {
    if (target.id === "show-keys") show();
    if (target.id === "close-keys" || target.id === "keys") list().close();
  });
})();
