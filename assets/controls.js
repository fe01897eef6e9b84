/* Controls and the buttons of each view where app/controls.py describes one, and one listener for
   every control. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});

  function element(kind, attributes, ...children) {
    const made = document.createElement(kind);
    for (const [name, value] of Object.entries(attributes)) if (value !== undefined) made.setAttribute(name, value);
    made.append(...children);
    return made;
  }

  function input(name, { type, value, min, max, step, placeholder, accept, orient }) {
    const made = element("input", { type, id: `field-${name}`, min, max, step, placeholder, accept });
    if (type === "file") {
      made.multiple = true;
      made.setAttribute("aria-label", "Files of a release");
      return made;
    }
    made.dataset.field = name;
    made.setAttribute("aria-describedby", `help-${name}`);
    if (value !== undefined) made.value = value;
    if (orient) { made.dataset.orient = orient; made.setAttribute("aria-orientation", orient); }
    return made;
  }

  function select(name, { value = "", options }) {
    const made = element("select", { id: `field-${name}`, "data-field": name, "aria-describedby": `help-${name}` });
    made.append(...JSON.parse(options).map(([each, words]) => element("option", { value: each }, words)));
    made.value = value;
    return made;
  }

  /* Label, "?" (help.js), the field, and the sentence of help. */
  function control(holder) {
    const { control: name, label, helpWords, type } = holder.dataset;
    const says = element("label", { for: `field-${name}` }, label);
    const help = element("button", {
      type: "button", class: "help", "data-help": `help-${name}`, "aria-label": `Help on ${label}`,
      "aria-describedby": `help-${name}`,
    }, "?");
    const head = type === "range" ? [says, help] : [element("span", { class: "label" }, says, help)];
    if (type === "range") says.className = "hidden-label";
    const field = type === "select" ? select(name, holder.dataset)
      : element("span", { class: "native" }, input(name, holder.dataset));
    return [...head, field, element("span", { id: `help-${name}`, class: "hidden-label" }, helpWords)];
  }

  const verb = (kind) => [element("span", { class: "verb" }, "Save\u00a0"), kind]; // dropped where room is short
  const BUTTONS = {
    table: (view) => element("button", { type: "button", "data-table": view, "aria-expanded": "false" }, "Table"),
    png: (view) => element("button", { type: "button", "data-save": "png", "data-view": view }, ...verb("PNG")),
    svg: (view) => element("button", { type: "button", "data-save": "svg", "data-view": view }, ...verb("SVG")),
    csv: (view) => element("a", { id: `csv-${view}`, class: "button", "data-csv": view, href: csvOf(view) }, ...verb("CSV")),
    brief: (view) => element("button", { type: "button", "data-brief": view }, "Add to brief"),
  };

  /* What is built in which places. The renderer may use an element again for another control. */
  const BUILT = {
    control,
    saves: (holder) => holder.dataset.kinds.split(" ").map((kind) => BUTTONS[kind](holder.dataset.saves)),
    native: (holder) => [input(holder.dataset.native, holder.dataset)],
  };

  new MutationObserver(() => {
    for (const [mark, build] of Object.entries(BUILT)) {
      for (const holder of document.querySelectorAll(`[data-${mark}]`)) {
        const { [mark]: name, value, options } = holder.dataset;
        const described = [name, value, options].join("|");
        if (holder.firstChild && holder.described === described) continue;
        holder.described = described;
        holder.replaceChildren(...build(holder));
      }
    }
  }).observe(document.documentElement, {
    childList: true, subtree: true, attributeFilter: ["data-control", "data-saves", "data-native", "data-value"],
  });

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

  let told = null; // page and state of the files
  const csvOf = (view) => (told ? `/export/${told.page}/${view}.csv${told.search}` : undefined);

  /* Put the state into the address bar, the CSV links and the navigation; ask for its answer. */
  function publish(page, state, defaults, ask = true) {
    const text = query(state, defaults);
    const search = text ? `?${text}` : "";
    history.replaceState(history.state, "", `${location.pathname}${search}`);
    told = { page, search };
    for (const link of document.querySelectorAll("[data-csv]")) link.href = csvOf(link.dataset.csv);
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
