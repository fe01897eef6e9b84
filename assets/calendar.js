/* Months, quarters and years by their ordinal (0 is the period that holds January 1970). */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});
  const MONTHS = ["Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"];

  function parts(ordinal, perYear) {
    const place = ((ordinal % perYear) + perYear) % perYear;
    return { year: 1970 + (ordinal - place) / perYear, place };
  }

  function label(ordinal, perYear) {
    const { year, place } = parts(ordinal, perYear);
    if (perYear === 12) return `${MONTHS[place]} ${year}`;
    return perYear === 4 ? `${year} Q${place + 1}` : String(year);
  }

  function code(ordinal, perYear) {
    const { year, place } = parts(ordinal, perYear);
    if (perYear === 12) return `${year}-${String(place + 1).padStart(2, "0")}`;
    return perYear === 4 ? `${year}-Q${place + 1}` : String(year);
  }

  function firstDay(ordinal, perYear) {
    const { year, place } = parts(ordinal, perYear);
    return `${year}-${String(place * (12 / perYear) + 1).padStart(2, "0")}-01`;
  }

  /* The same in milliseconds, as an axis of dates counts. */
  function firstMoment(ordinal, perYear) {
    const { year, place } = parts(ordinal, perYear);
    return Date.UTC(year, place * (12 / perYear), 1);
  }

  function decimalYear(ordinal, perYear) {
    return 1970 + (ordinal + 0.5) / perYear;
  }

  pricewake.calendar = { label, code, firstDay, firstMoment, decimalYear };
})();
