/* A page that the server answers whole: a control changes the state, the server answers with words
   and charts. app/pages/plain.py is the other half. */
(function () {
  "use strict";
  const pricewake = window.pricewake;
  const { controls } = pricewake;
  const page = { data: null, state: null, timer: 0 };
  const DRAGGING = 120; // milliseconds between answers while a slider is dragged

  const root = () => document.querySelector("[data-page]");

  function send() {
    page.timer = 0;
    if (root()) controls.publish(root().dataset.page, page.state, page.data.defaults);
  }

  function change(field, element, wait) {
    if (!root() || !page.state) return;
    page.state = { ...page.state, [field]: controls.valueOf(element) };
    clearTimeout(page.timer);
    page.timer = setTimeout(send, wait);
  }

  /* What the server answered: {state, defaults, sentence, subtitles, source, stem, figures}. */
  function adopt(data) {
    if (!data || !root()) return window.dash_clientside.no_update;
    const name = root().dataset.page;
    page.data = data;
    if (!page.timer) {
      page.state = data.state;
      controls.publish(name, page.state, data.defaults);
    }
    for (const [view, figure] of Object.entries(data.figures || {})) {
      if (document.getElementById(`${name}-${view}`)) pricewake.theme.show(`${name}-${view}`, figure);
    }
    return window.dash_clientside.no_update;
  }

  controls.on("change", (field, element) => change(field, element, 0));
  controls.on("input", (field, element) => { if (element.type === "range") change(field, element, DRAGGING); });
  document.addEventListener("click", (event) => {
    const chosen = event.target.closest && event.target.closest("[data-set]");
    if (!chosen || !root() || !page.state) return;
    page.state = { ...page.state, [chosen.dataset.set]: chosen.dataset.value };
    send();
  });

  window.dash_clientside = Object.assign({}, window.dash_clientside, { plain: { adopt } });
  Object.assign(page, {
    sentence: () => page.data.sentence,
    subtitle: (view) => (page.data.subtitles || {})[view] || "",
    source: () => page.data.source,
    stem: (view) => `${view} ${page.data.stem}`,
    busy: () => Boolean(page.timer),
  });
  pricewake.plain = page;
})();
