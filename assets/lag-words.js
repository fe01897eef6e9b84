/* Sentences of the Lag page that follow the hand. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const signed = (value, digits) => (value < 0 ? "−" : "+") + Math.abs(value).toFixed(digits);
  const plain = (value, digits) => (value < 0 ? "−" : "") + Math.abs(value).toFixed(digits);
  const counted = (n, noun) => `${n} ${noun}${n === 1 ? "" : "s"}`;

  /* The headline; a part [field, words, tail] is a number that leads to its slider. */
  function sentenceParts({ driver, response, noun }, { window, shift }) {
    const smoothed = window === 1 ? `one ${noun} at a time` : `averaged over ${window} ${noun}s`;
    const later = shift > 0 ? `${counted(shift, noun)} later` : shift < 0 ? `${counted(-shift, noun)} earlier` : `of the same ${noun}`;
    return [driver.name, ", ", ["window", smoothed, ","], " against ", response.name, " ", ["shift", later, "."]];
  }

  function equation({ noun }, cell) {
    const slope = `${cell.slope < 0 ? "−" : "+"} ${Math.abs(cell.slope).toFixed(3)} × driver`;
    return `response = ${plain(cell.intercept, 3)} ${slope}    r = ${signed(cell.correlation, 2)}    n = ${counted(cell.n, noun)}`;
  }

  /* Second line of a saved chart. */
  function subtitle(page, view) {
    if (view !== "surface") return `${page.equation()}    ${page.data.span}`;
    const searched = page.known && page.known.support.length;
    return `${page.data.span}. The cross marks the chosen cell.${searched ? " Outside the black line the search-adjusted p is above 5 % (paler)." : ""}`;
  }

  /* File name of a saved chart: exports.file_stem. */
  function stem({ driver, response, window, shift }, view, letters) {
    const sides = `${letters(driver).slice(0, 40)}-${letters(response).slice(0, 40)}`;
    return `${view}-${sides}-window-${window}-shift-${shift < 0 ? "minus-" : ""}${Math.abs(shift)}`;
  }

  pricewake.words = { counted, signed, sentenceParts, equation, subtitle, stem };
})();
