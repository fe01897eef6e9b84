/* A table that is wider or taller than its place scrolls; then the keyboard has to reach it. */
(function () {
  "use strict";
  function look() {
    for (const box of document.querySelectorAll(".table, .run-table, .place")) {
      const scrolls = box.scrollWidth > box.clientWidth + 1 || box.scrollHeight > box.clientHeight + 1;
      const reached = box.hasAttribute("tabindex");
      if (scrolls && !reached) box.setAttribute("tabindex", "0");
      else if (!scrolls && reached) box.removeAttribute("tabindex");
    }
  }
  let soon = 0;
  const later = () => { if (!soon) soon = setTimeout(() => { soon = 0; look(); }, 150); };
  new MutationObserver(later).observe(document.documentElement, { childList: true, subtree: true });
  window.addEventListener("resize", later);
  document.addEventListener("toggle", later, true);
})();
