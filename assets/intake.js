/* Files chosen or dropped on the Data page go to the server one after another, with progress, and
   are held there for a look. Nothing is kept before "Keep these series". */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const intake = { request: null, stopped: false, busy: false };
  const byId = (id) => document.getElementById(id);
  const props = (id, values) => window.dash_clientside.set_props(id, values);

  const MANY = 8; // lines of files that are well; more are folded

  function paragraph({ text, bad }) {
    const line = document.createElement("p");
    line.textContent = text;
    line.className = bad ? "bad" : "good";
    return line;
  }

  /* One line a file; a refusal is marked. Of many files the refusals come first. */
  function say(lines) {
    const place = byId("intake-message");
    if (!place) return;
    const good = lines.filter((line) => !line.bad);
    if (good.length < lines.length) setTimeout(() => place.scrollIntoView({ block: "nearest" }), 0);
    if (good.length <= MANY) return place.replaceChildren(...lines.map(paragraph));
    const fold = document.createElement("details"), head = document.createElement("summary");
    head.textContent = `${good.length} files: ${good[0].done || "read; nothing is kept yet"}`;
    fold.append(head, ...good.map(paragraph));
    place.replaceChildren(...lines.filter((line) => line.bad).map(paragraph), fold);
  }

  function progress(words, share) {
    const work = byId("intake-work");
    if (!work) return;
    work.hidden = words === null;
    if (words === null) return;
    byId("intake-progress-words").textContent = words;
    const bar = byId("intake-progress");
    if (share === null) bar.removeAttribute("value");
    else bar.value = share;
  }

  function send(file, place, all) {
    return new Promise((resolve) => {
      const request = (intake.request = new XMLHttpRequest());
      const where = all > 1 ? ` (${place + 1} of ${all})` : "";
      request.open("POST", `/intake?preview=1&name=${encodeURIComponent(file.name)}`);
      request.setRequestHeader("Content-Type", "application/octet-stream");
      request.upload.onprogress = (event) => {
        if (event.lengthComputable) progress(`Sending ${file.name}${where}`, event.loaded / event.total);
      };
      request.upload.onload = () => progress(`Reading ${file.name}${where}`, null);
      request.onabort = () => resolve(null);
      request.onload = request.onerror = () => {
        let answer = {};
        try { answer = JSON.parse(request.responseText); } catch (_) { /* told below */ }
        if (request.status === 200) resolve(answer);
        else resolve({ message: answer.message || `${file.name} could not be sent; is Pricewake still running?` });
      };
      progress(`Sending ${file.name}${where}`, 0);
      request.send(file);
    });
  }

  async function take(files) {
    if (intake.busy || !files.length) return;
    Object.assign(intake, { busy: true, stopped: false });
    const lines = [], tokens = [];
    for (const [place, file] of files.entries()) {
      const answer = intake.stopped ? null : await send(file, place, files.length);
      if (answer === null) {
        lines.push({ text: `Cancelled: ${files.length - place} of ${files.length} files were not read.`, bad: true });
        break;
      }
      if (!answer.token) lines.push({ text: answer.message, bad: true });
      else {
        tokens.push(answer.token);
        const found = answer.problems ? `, ${answer.problems} thing${answer.problems === 1 ? "" : "s"} to look at` : "";
        lines.push({ text: `${answer.file}: ${answer.series.length} series read${found}; nothing is kept yet.` });
      }
    }
    Object.assign(intake, { busy: false, request: null });
    progress(null);
    say(lines);
    const field = byId("field-files");
    if (field) field.value = "";
    if (tokens.length) pricewake.pending.add(tokens);
  }

  function cancel() {
    intake.stopped = true;
    if (intake.request) intake.request.abort();
  }

  document.addEventListener("change", (event) => {
    if (event.target.id === "field-files") take([...event.target.files]);
  });
  document.addEventListener("click", (event) => {
    if (event.target.id === "intake-cancel") cancel();
  });
  for (const kind of ["dragover", "dragleave", "drop"]) {
    document.addEventListener(kind, (event) => {
      const zone = event.target.closest && event.target.closest("#data-drop");
      if (!zone) return;
      if (kind !== "dragleave") event.preventDefault();
      zone.classList.toggle("over", kind === "dragover");
      if (kind === "drop") take([...event.dataTransfer.files]);
    });
  }

  pricewake.intake = { say, props, busy: () => intake.busy };
})();
