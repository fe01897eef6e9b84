/* One cell of the lag map, computed in the browser while a slider moves. The twin of
   analytics/cell.py: tests/browser/test_numbers.py holds the two equal to 1e-9. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});

  function trailingMean(values, window) {
    const means = new Float64Array(Math.max(0, values.length - window + 1));
    for (let i = 0; i < means.length; i++) {
      let sum = 0;
      for (let k = i; k < i + window; k++) sum += values[k];
      means[i] = sum / window;
    }
    return means;
  }

  function mean(values) {
    let sum = 0;
    for (const value of values) sum += value;
    return sum / values.length;
  }

  /* Variance at or below which a stretch counts as constant: surface.smallest_variance. */
  function smallestVariance(values) {
    const centre = mean(values);
    let square = 0, largest = 0;
    for (const value of values) {
      square += (value - centre) ** 2;
      largest = Math.max(largest, Math.abs(value));
    }
    return Math.max((1e-12 * square) / values.length, (1e-12 * largest) ** 2);
  }

  function sliceMeans(along, other, slices) {
    let low = Infinity, high = -Infinity;
    for (const value of along) { low = Math.min(low, value); high = Math.max(high, value); }
    const count = new Array(slices).fill(0), sum = new Array(slices).fill(0);
    for (let i = 0; i < along.length; i++) {
      const place = Math.min(slices - 1, Math.floor(((along[i] - low) / (high - low)) * slices));
      count[place] += 1;
      sum[place] += other[i];
    }
    const width = (high - low) / slices;
    return {
      centre: count.map((_, k) => low + (k + 0.5) * width),
      mean: count.map((n, k) => (n ? sum[k] / n : null)),
      count,
    };
  }

  /* The cell (window, shift); null where too few pairs are left or a side does not vary.
     `start` is the place of the first driver month in the series given. */
  function cell(driver, response, window, shift, minPairs = 24, slices = 8) {
    const smoothDriver = trailingMean(driver, window);
    const smoothResponse = trailingMean(response, window);
    const from = Math.max(0, -shift);
    const n = smoothDriver.length - Math.abs(shift);
    if (n < minPairs) return null;
    const x = smoothDriver.slice(from, from + n);
    const y = smoothResponse.slice(from + shift, from + shift + n);
    const meanX = mean(x), meanY = mean(y);
    let sxx = 0, syy = 0, sxy = 0;
    for (let i = 0; i < n; i++) {
      const dx = x[i] - meanX, dy = y[i] - meanY;
      sxx += dx * dx; syy += dy * dy; sxy += dx * dy;
    }
    if (!(sxx > smallestVariance(driver) * n) || !(syy > smallestVariance(response) * n)) return null;
    const slope = sxy / sxx, intercept = meanY - slope * meanX;
    const correlation = Math.max(-1, Math.min(1, sxy / Math.sqrt(sxx * syy)));
    let ssr = 0;
    for (let i = 0; i < n; i++) ssr += (y[i] - intercept - slope * x[i]) ** 2;
    const sdX = Math.sqrt(sxx / (n - 1)), sdY = Math.sqrt(syy / (n - 1));
    const side = Math.sqrt(Math.max(0, 1 - correlation * correlation));
    const ellipse = { x: [], y: [] };
    for (let k = 0; k <= 72; k++) {
      const a = (2 * Math.PI * k) / 72;
      ellipse.x.push(meanX + 2 * sdX * Math.cos(a));
      ellipse.y.push(meanY + 2 * sdY * (correlation * Math.cos(a) + side * Math.sin(a)));
    }
    return {
      window, shift, n, start: from + window - 1, driver: x, response: y,
      slope, intercept, correlation, ellipse,
      seNaive: Math.sqrt(ssr / (n - 2) / sxx),
      driverSlices: sliceMeans(x, y, slices),
      responseSlices: sliceMeans(y, x, slices),
    };
  }

  pricewake.numbers = { trailingMean, cell };
})();
