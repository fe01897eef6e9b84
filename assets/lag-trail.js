/* Undo and redo of the state of the Lag page: the browser's own history, one entry where the hand has
   rested, so that Back and the Undo button are the same thing. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const { controls } = pricewake;
  const RESTED = 700; // milliseconds
  const trail = { index: 0, last: 0, address: null, timer: 0 };
  const byId = (id) => document.getElementById(id);
  const here = () => location.pathname + location.search;

  function buttons() {
    if (byId("undo")) byId("undo").disabled = trail.index === 0;
    if (byId("redo")) byId("redo").disabled = trail.index >= trail.last;
  }

  /* A page that has just come: what it shows is an entry. */
  function begin() {
    clearTimeout(trail.timer);
    trail.index = (history.state && history.state.lagIndex) || 0;
    trail.last = trail.index;
    trail.address = here();
    history.replaceState({ ...history.state, lagIndex: trail.index }, "", here());
    buttons();
  }

  function remember() {
    trail.timer = 0;
    const address = here();
    if (address === trail.address || !byId("lag-sentence")) return;
    history.replaceState(history.state, "", trail.address); // moves have written over the entry
    trail.index += 1;
    trail.last = trail.index;
    trail.address = address;
    history.pushState({ ...history.state, lagIndex: trail.index }, "", address);
    buttons();
  }

  function rested() {
    clearTimeout(trail.timer);
    trail.timer = setTimeout(remember, RESTED);
  }

  const back = () => { if (trail.timer) { clearTimeout(trail.timer); remember(); } if (trail.index > 0) history.back(); };
  const forward = () => { if (trail.index < trail.last) history.forward(); };

  /* The state of an address: the twin of ViewState.from_query for what this page wrote. */
  function stateOf(search) {
    const { defaults } = pricewake.lag.data;
    const state = { ...defaults };
    for (const [name, text] of new URLSearchParams(search)) {
      if (name in defaults) state[name] = typeof defaults[name] === "number" ? Number(text) : text;
    }
    return state;
  }

  window.addEventListener("popstate", (event) => {
    const page = pricewake.lag;
    const ours = byId("lag-sentence") && /^\/(lag)?$/.test(location.pathname);
    if (!ours || !event.state || event.state.lagIndex === undefined || !page.data) return;
    event.stopImmediatePropagation(); // the page stays; only its state goes back
    clearTimeout(trail.timer);
    trail.timer = 0;
    trail.index = event.state.lagIndex;
    trail.last = Math.max(trail.last, trail.index);
    trail.address = here();
    page.take(stateOf(location.search));
    buttons();
  }, true);

  document.addEventListener("click", (event) => {
    if (event.target.id === "undo") back();
    if (event.target.id === "redo") forward();
  });

  pricewake.trail = { begin, rested, back, forward, state: trail };
})();
