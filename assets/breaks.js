/* Buttons of the Data page that mark a break or take a mark away. The server answers with a
   sentence where it cannot be done; the page then asks for itself anew. */
(function () {
  "use strict";
  const byId = (id) => document.getElementById(id);

  function say(text, bad) {
    const line = document.createElement("p");
    line.textContent = text;
    line.className = bad ? "bad" : "good";
    byId("breaks-message").replaceChildren(line);
    if (bad) byId("breaks-message").scrollIntoView({ block: "nearest" }); // it may stand below a long list
  }

  async function send(act, body) {
    try {
      const answer = await fetch(`/workspace/${act}`, {
        method: "POST",
        headers: { "Content-Type": "application/json" },
        body: JSON.stringify(body),
      });
      const data = await answer.json();
      return answer.ok ? "" : data.message || "this could not be done";
    } catch (_) {
      return "The program does not answer; is Pricewake still running?";
    }
  }

  /* The button goes with the answer: go on to the next finding, else to what was done. */
  function goOn(button, row, tries = 100) {
    if (button.isConnected && tries) return setTimeout(() => goOn(button, row, tries - 1), 50);
    if (document.activeElement !== document.body) return;
    const next = row && row.isConnected && row.nextElementSibling;
    ((next && next.querySelector("select, button")) || byId("breaks-message")).focus({ preventScroll: true });
  }

  /* Treatments by overlap need the overlapping series named, too. */
  const overlaps = (treatment) => treatment.startsWith("overlap");

  document.addEventListener("change", ({ target }) => {
    if (!target.matches || !target.matches('[data-break-box] [data-part="treatment"]')) return;
    const other = target.closest("[data-break-box]").querySelector('[data-part="other"]');
    if (other) other.hidden = !overlaps(target.value);
  });

  document.addEventListener("click", async (event) => {
    const button = event.target.closest && event.target.closest("[data-break]");
    if (!button) return;
    const act = button.dataset.break;
    const box = button.closest("[data-break-box]");
    const part = (name) => box && box.querySelector(`[data-part="${name}"]`);
    const body = { series: button.dataset.series, period: button.dataset.period };
    if (act === "mark") {
      body.treatment = part("treatment").value;
      if (overlaps(body.treatment)) body.treatment += `:${part("other").value}`;
      if (part("series")) {
        Object.assign(body, {
          series: part("series").value,
          period: byId("break-period").value,
          note: byId("break-note").value,
        });
      }
    }
    const row = button.closest("tr");
    const refused = await send(act, body);
    if (refused) return say(refused, true);
    window.dash_clientside.set_props("data-tick", { data: Date.now() });
    const done = act === "mark" ? "is marked and treated on every page" : "is no longer marked";
    say(`The break of ${body.series} at ${body.period} ${done}.`, false);
    if (row) goOn(button, row);
  });
})();
