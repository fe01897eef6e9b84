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

  /* The part of an address after "?": fields that differ from their default, in field order. The
     twin of ViewState.to_query; `defaults` comes from Python in field order. */
  function query(state, defaults) {
    const pairs = Object.keys(defaults)
      .filter((name) => name in state && state[name] !== defaults[name])
      .map((name) => [name, state[name]]);
    return new URLSearchParams(pairs).toString().replaceAll("%7E", "~").replaceAll("*", "%2A");
  }

  /* Give the links of the other pages the date whose vintages are shown; of the two pages of a pair
     of series, the pair and the cell as well. */
  const PAIRED = ["lag", "outlook"];
  const PAIR = ["driver", "response", "window", "shift", "growth", "first", "last", "season", "meet", "windows", "shifts"];

  function carry(page, state, defaults) {
    for (const link of document.querySelectorAll("[id^='nav-']")) {
      const other = link.id.slice("nav-".length);
      if (other === page) continue;
      const address = new URL(link.href), before = address.search;
      const carried = PAIRED.includes(page) && PAIRED.includes(other) ? ["as_of", ...PAIR] : ["as_of"];
      for (const name of carried) {
        if (name in state && state[name] !== defaults[name]) address.searchParams.set(name, state[name]);
        else address.searchParams.delete(name);
      }
      if (address.search !== before) {
        window.dash_clientside.set_props(link.id, { href: address.pathname + address.search });
      }
    }
  }

  /* Put the state into the address bar, the CSV links and the navigation; ask for its answer. */
  function publish(page, state, defaults, ask = true) {
    const text = query(state, defaults);
    const search = text ? `?${text}` : "";
    history.replaceState(history.state, "", `${location.pathname}${search}`);
    for (const link of document.querySelectorAll("[data-csv]")) {
      link.href = `/export/${page}/${link.dataset.csv}.csv${search}`;
    }
    window.dash_clientside.set_props(`nav-${page}`, { href: `/${page}${search}` });
    carry(page, state, defaults);
    if (ask) window.dash_clientside.set_props(`${page}-state`, { data: state });
  }

  /* What a control holds, as the state takes it: a number where the field is one. */
  const valueOf = (element) =>
    element.type === "range" || element.type === "number" ? Number(element.value) : element.value.trim();

  pricewake.controls = {
    valueOf,
    query,
    publish,
    on: (kind, listener) => heard[kind].push(listener),
    field: (name) => document.getElementById(`field-${name}`),
  };
})();
