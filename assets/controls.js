/* Native inputs where app/controls.py asked for one, and one listener for every control. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});

  function build(holder) {
    const { native, type, value, min, max, step, placeholder, accept, orient } = holder.dataset;
    const input = document.createElement("input");
    input.type = type;
    input.id = `field-${native}`;
    for (const [name, given] of Object.entries({ min, max, step, placeholder, accept })) {
      if (given !== undefined) input.setAttribute(name, given);
    }
    if (type === "file") {
      input.multiple = true;
      input.setAttribute("aria-label", "Files of a release");
    } else {
      input.dataset.field = native;
      input.setAttribute("aria-describedby", `help-${native}`);
      if (value !== undefined) input.value = value;
    }
    if (orient) { input.dataset.orient = orient; input.setAttribute("aria-orientation", orient); }
    holder.replaceChildren(input);
  }

  new MutationObserver(() => {
    for (const holder of document.querySelectorAll("[data-native]:empty")) build(holder);
  }).observe(document.documentElement, { childList: true, subtree: true });

  const heard = { input: [], change: [] };
  for (const kind of ["input", "change"]) {
    document.addEventListener(kind, (event) => {
      const field = event.target.dataset && event.target.dataset.field;
      if (field) for (const listener of heard[kind]) listener(field, event.target);
    });
  }

  pricewake.controls = {
    on: (kind, listener) => heard[kind].push(listener),
    field: (name) => document.getElementById(`field-${name}`),
  };
})();
