/* Sentences of the Lag page that follow the hand. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  /* A number with its sign; what rounds to zero has none below it. The twin of app/words.py. */
  function signed(value, digits, above = "+") {
    const size = Math.abs(value).toFixed(digits);
    return (value < 0 && Number(size) ? "−" : above) + size;
  }
  const plain = (value, digits) => signed(value, digits, "");
  /* Write words into a place. A text that is there is written over: nothing is added to the page, so
     nobody who watches it for new parts is called. */
  function write(place, text) {
    const there = place.firstChild;
    if (!there || there.nodeType !== Node.TEXT_NODE || there.nextSibling) place.textContent = text;
    else if (there.data !== text) there.data = text;
  }
  const asSentence = (words) => words.charAt(0).toUpperCase() + words.slice(1) + (/[.?]$/.test(words) ? "" : ".");
  const counted = (n, noun) => `${n} ${noun}${n === 1 ? "" : "s"}`;

  /* The headline; a part [field, words, tail] is a number that leads to its slider. */
  function sentenceParts({ driver, response, noun, without }, { window, shift }) {
    const smoothed = window === 1 ? `one ${noun} at a time` : `averaged over ${window} ${noun}s`;
    const later = shift > 0 ? `${counted(shift, noun)} later` : shift < 0 ? `${counted(-shift, noun)} earlier` : `of the same ${noun}`;
    const tail = without ? [["shift", later, ","], ` ${without.replace(/^, /, "")}.`] : [["shift", later, "."]];
    return [driver.name, ", ", ["window", smoothed, ","], " against ", response.name, " ", ...tail];
  }

  const sentence = (page) =>
    sentenceParts(page.data, page.state).map((p) => (typeof p === "string" ? p : p[1] + p[2])).join("");

  /* The line under the headline. */
  function readout({ cell, data }) {
    return cell
      ? `Correlation ${signed(cell.correlation, 2)} over ${counted(cell.n, data.noun)}, ${data.span}${data.without}.`
      : `This cell is undefined: it leaves fewer than ${data.minPairs} ${data.noun}s, or one side does not vary.`;
  }

  function movedResponse({ state, data }) {
    const away = counted(Math.abs(state.shift), data.noun);
    return data.response.name + (state.shift === 0 ? "" : `, moved ${state.shift > 0 ? "back" : "forward"} by ${away}`);
  }

  /* What the band holds: its ends, its months, the mean of the other side against that of all. */
  function sliceSentence({ slice, data, state }) {
    if (!slice) return "";
    const [side, other] = slice.across ? ["driver", "response"] : ["response", "driver"];
    const ends = `${side} from ${plain(slice.low, 2)} to ${plain(slice.high, 2)} ${data[side].unit}`;
    if (!slice.count) return `Slice: ${ends} holds no ${data.noun}.`;
    return `Slice: ${ends} holds ${counted(slice.count, data.noun)}; mean ${other} ${plain(slice.mean, 2)}, against ${plain(slice.path.overall, 2)} over all. The line is this mean as the slice sweeps, ${state.band_width} % of the range wide.`;
  }

  function equation({ noun }, cell) {
    const slope = signed(cell.slope, 3).replace(/^./, "$& ");
    const measures = [`r = ${signed(cell.correlation, 2)}`, `n = ${counted(cell.n, noun)}`].map((each) => each.replaceAll(" ", "\u00a0"));
    return `response = ${plain(cell.intercept, 3)} ${slope} × driver    ${measures.join("    ")}`;
  }

  /* Second line of a saved chart. */
  function subtitle(page, view) {
    if (view === "scatter" && page.slice) return `${page.equation()}    ${sliceSentence(page)}`;
    if (view !== "surface") return `${page.equation()}    ${page.data.span}`;
    const searched = page.known && page.known.support.length;
    return `${page.data.span}. The cross marks the chosen cell.${searched ? " Outside the black line the search-adjusted p is above 5 % (paler)." : ""}`;
  }

  /* File name of a saved chart: exports.file_stem. */
  function stem({ driver, response, window, shift }, view, letters) {
    const sides = `${letters(driver).slice(0, 40)}-${letters(response).slice(0, 40)}`;
    return `${view}-${sides}-window-${window}-shift-${shift < 0 ? "minus-" : ""}${Math.abs(shift)}`;
  }

  pricewake.words = { write, asSentence, counted, signed, sentenceParts, sentence, readout, movedResponse, sliceSentence, equation, subtitle, stem };
})();
