/* Is the program still there? A page says when it is not, goes on by itself when it is back, and opens
   anew when another run of the program answers, since its data may be others. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const CALM = 10000, ANXIOUS = 1000, PATIENCE = 5000; // milliseconds
  const SAID = "pricewake-said";
  const link = { run: null, lost: false, timer: 0 };

  const place = () => document.getElementById("connection");

  function say(text) {
    if (!place()) return;
    place().hidden = !text;
    document.documentElement.classList.toggle("noticed", Boolean(text)); // ":has" would be asked at every move
    if (place().textContent !== text) place().textContent = text;
  }

  function lost() {
    link.lost = true;
    say("Pricewake does not answer. What is on the page stays; it goes on by itself when the program runs again.");
  }

  function found({ run, invented }) {
    const note = document.getElementById("invented");
    if (note) note.hidden = !invented;
    if (link.run && link.run !== run) {
      try { sessionStorage.setItem(SAID, "Pricewake was started again; this page has been opened anew."); } catch (_) { /* a locked-down browser */ }
      location.reload();
      return;
    }
    link.run = run;
    if (!link.lost) return;
    link.lost = false;
    say("Pricewake answers again.");
    setTimeout(() => { if (!link.lost) say(""); }, PATIENCE);
    const page = document.querySelector("[data-page]");
    const tick = page ? `${page.dataset.page}-tick` : document.querySelector(".lag-page") ? "lag-tick" : null;
    if (tick) window.dash_clientside.set_props(tick, { data: Date.now() }); // ask again for what was lost
  }

  async function look() {
    clearTimeout(link.timer);
    try {
      const answer = await plainFetch("/alive", { signal: AbortSignal.timeout(PATIENCE) });
      if (answer.ok) found(await answer.json());
    } catch (_) {
      lost();
    }
    link.timer = setTimeout(look, document.hidden ? 6 * CALM : link.lost ? ANXIOUS : CALM);
  }

  /* A request of the page that fails is the first sign; one that changes the data may end the invention. */
  const plainFetch = window.fetch.bind(window);
  window.fetch = async (...asked) => {
    try {
      const answer = await plainFetch(...asked);
      if (/^\/(intake|workspace)\//.test(String(asked[0]))) look();
      return answer;
    } catch (error) {
      if (error instanceof TypeError) look();
      throw error;
    }
  };

  document.addEventListener("visibilitychange", () => { if (!document.hidden) look(); });
  window.addEventListener("load", () => {
    look();
    let words = null;
    try { words = sessionStorage.getItem(SAID); sessionStorage.removeItem(SAID); } catch (_) { /* as above */ }
    if (!words) return;
    const wait = setInterval(() => {
      if (!place()) return;
      clearInterval(wait);
      say(words);
      setTimeout(() => { if (!link.lost) say(""); }, 2 * PATIENCE);
    }, 100);
  });

  pricewake.connection = Object.assign(link, { say });
})();
