/* Mark the link of the page that is open, for eyes and for screen readers. */
(function () {
  "use strict";
  new MutationObserver(() => {
    for (const link of document.querySelectorAll("[id^='nav-']")) {
      const here = (location.pathname === "/" ? "/lag" : location.pathname) === new URL(link.href).pathname;
      if (here !== link.hasAttribute("aria-current")) link.toggleAttribute("aria-current", here);
      if (here && link.getAttribute("aria-current") !== "page") link.setAttribute("aria-current", "page");
    }
  }).observe(document.documentElement, { childList: true, subtree: true });
})();
