/* One sentence of help beside each control, from the table of fields: on hover, on focus and on
   touch; Escape puts it away, and the pointer may rest on it. */
(function () {
  "use strict";
  let bubble = null, owner = null;

  function place() {
    const at = owner.getBoundingClientRect();
    const width = Math.min(280, window.innerWidth - 16);
    bubble.style.maxWidth = `${width}px`;
    const left = Math.max(8, Math.min(at.left - 8, window.innerWidth - bubble.offsetWidth - 8));
    const below = at.bottom + 4 + bubble.offsetHeight < window.innerHeight;
    bubble.style.left = `${left}px`;
    bubble.style.top = `${below ? at.bottom + 2 : at.top - bubble.offsetHeight - 2}px`;
  }

  function show(button) {
    const source = document.getElementById(button.dataset.help);
    if (!source) return;
    if (!bubble) {
      bubble = document.createElement("div");
      bubble.className = "hint";
      bubble.setAttribute("aria-hidden", "true"); // the button is described by the sentence itself
      bubble.addEventListener("mouseleave", hide);
      document.body.append(bubble);
    }
    owner = button;
    bubble.textContent = source.textContent;
    bubble.hidden = false;
    place();
  }

  function hide() {
    owner = null;
    if (bubble) bubble.hidden = true;
  }

  const helped = (event) => event.target.closest && event.target.closest("[data-help]");
  document.addEventListener("mouseover", (event) => { const button = helped(event); if (button) show(button); });
  document.addEventListener("mouseout", (event) => {
    const to = event.relatedTarget;
    if (helped(event) && !(to && bubble && bubble.contains(to)) && document.activeElement !== owner) hide();
  });
  document.addEventListener("focusin", (event) => { const button = helped(event); if (button) show(button); else hide(); });
  document.addEventListener("focusout", (event) => { if (helped(event)) hide(); });
  document.addEventListener("click", (event) => { const button = helped(event); if (button) show(button); else hide(); });
  document.addEventListener("keydown", (event) => { if (event.key === "Escape") hide(); });
  window.addEventListener("scroll", hide, { passive: true });
})();
