/* Mark the link of the page that is open, and name it in the title, for eyes and screen readers. */
(function () {
  "use strict";
  new MutationObserver(() => {
    for (const link of document.querySelectorAll("[id^='nav-']")) {
      const here = (location.pathname === "/" ? "/lag" : location.pathname) === new URL(link.href).pathname;
      if (here !== link.hasAttribute("aria-current")) link.toggleAttribute("aria-current", here);
      if (!here) continue;
      if (link.getAttribute("aria-current") !== "page") link.setAttribute("aria-current", "page");
      const title = `${link.textContent} · Pricewake`;
      if (document.title !== title) document.title = title;
    }
  }).observe(document.documentElement, { childList: true, subtree: true });
})();
