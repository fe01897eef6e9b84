/* Files chosen or dropped on the Data page go to the server one by one, with progress. */
(function () {
  "use strict";

  function say(text) {
    const place = document.getElementById("data-message");
    if (place) place.textContent = text;
  }

  function send(file) {
    return new Promise((resolve) => {
      const request = new XMLHttpRequest();
      request.open("POST", `/intake?name=${encodeURIComponent(file.name)}`);
      request.setRequestHeader("Content-Type", "application/octet-stream");
      request.upload.onprogress = (event) => {
        if (event.lengthComputable) say(`Reading ${file.name}: ${Math.round((100 * event.loaded) / event.total)} %`);
      };
      request.onloadend = () => {
        let answer = {};
        try { answer = JSON.parse(request.responseText); } catch (_) { /* told below */ }
        if (request.status === 200) resolve(`${answer.file}: ${answer.series.length} series read${answer.problems ? `; ${answer.problems} things to look at, listed below` : ""}.`);
        else resolve(answer.message || `${file.name} could not be sent; is Pricewake still running?`);
      };
      request.send(file);
    });
  }

  async function take(files) {
    const said = [];
    for (const file of files) said.push(await send(file));
    say(said.join(" "));
    window.dash_clientside.set_props("data-tick", { data: Date.now() });
    window.dash_clientside.set_props("nav-lag", { href: "/lag" });
  }

  document.addEventListener("change", (event) => {
    if (event.target.id === "field-files") take([...event.target.files]);
  });
  for (const kind of ["dragover", "drop"]) {
    document.addEventListener(kind, (event) => {
      const zone = event.target.closest && event.target.closest("#data-drop");
      if (!zone) return;
      event.preventDefault();
      if (kind === "drop") take([...event.dataTransfer.files]);
    });
  }
})();
