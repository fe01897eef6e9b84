/* Small forms that keep something in the workspace. A button carries data-keep (the act), data-fields
   ("name:id ..." of the inputs it sends) or data-value ("name:text"), and data-said (where the answer
   goes). The page then asks for itself anew. */
(function () {
  "use strict";
  const byId = (id) => document.getElementById(id);
  const pairs = (text) => (text || "").split(" ").filter(Boolean).map((part) => part.split(":"));

  async function send(act, body) {
    try {
      const answer = await fetch(`/keep/${act}`, {
        method: "POST",
        headers: { "Content-Type": "application/json" },
        body: JSON.stringify(body),
      });
      const data = await answer.json();
      return [answer.ok, data.message || "this could not be done"];
    } catch (_) {
      return [false, "The program does not answer; is Pricewake still running?"];
    }
  }

  async function keep(button) {
    const { keep: act, fields, name, value, said } = button.dataset;
    const body = { query: location.search };
    if (name) body[name] = value;
    for (const [field, id] of pairs(fields)) body[field] = byId(id) ? byId(id).value : "";
    button.disabled = true;
    const [done, words] = await send(act, body);
    button.disabled = false;
    const line = document.createElement("p");
    line.textContent = words;
    line.className = done ? "good" : "bad";
    if (byId(said)) byId(said).replaceChildren(line);
    if (!done) return;
    for (const [, id] of pairs(fields)) if (byId(id) && byId(id).dataset.stays === undefined) byId(id).value = "";
    const page = document.querySelector("[data-page]");
    if (page) window.dash_clientside.set_props(`${page.dataset.page}-tick`, { data: Date.now() });
    if (byId(said) && !button.isConnected) byId(said).focus();
  }

  document.addEventListener("click", (event) => {
    const button = event.target.closest && event.target.closest("[data-keep]");
    if (button) keep(button);
  });
  document.addEventListener("keydown", (event) => {
    if (event.key !== "Enter" || event.target.tagName !== "INPUT" || !event.target.id) return;
    const button = document.querySelector(`[data-fields$=":${CSS.escape(event.target.id)}"]`);
    if (button) { event.preventDefault(); button.click(); }
  });
})();
