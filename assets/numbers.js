/* One cell of the lag map, computed in the browser while a slider moves. The twin of
   analytics/cell.py and slices.py: tests/browser/test_lag_page.py holds them equal to 1e-9. */
(function () {
  "use strict";
  const pricewake = (window.pricewake = window.pricewake || {});

  /* What was found of an array for its last argument: a slider asks for the same again and again. */
  function remembered(find) {
    const found = new WeakMap();
    return (values, argument) => {
      const last = found.get(values);
      if (last && last.argument === argument) return last.result;
      const result = find(values, argument);
      found.set(values, { argument, result });
      return result;
    };
  }

  const trailingMean = remembered((values, window) => {
    const means = new Float64Array(Math.max(0, values.length - window + 1));
    for (let i = 0; i < means.length; i++) {
      let sum = 0;
      for (let k = i; k < i + window; k++) sum += values[k];
      means[i] = sum / window;
    }
    return means;
  });

  function mean(values) {
    let sum = 0;
    for (let i = 0; i < values.length; i++) sum += values[i];
    return sum / values.length;
  }

  /* Variance at or below which a stretch counts as constant: surface.smallest_variance. */
  const smallestVariance = remembered((values) => {
    const centre = mean(values);
    let square = 0, largest = 0;
    for (const value of values) {
      square += (value - centre) ** 2;
      largest = Math.max(largest, Math.abs(value));
    }
    return Math.max((1e-12 * square) / values.length, (1e-12 * largest) ** 2);
  });

  function sliceMeans(along, other, slices) {
    let low = Infinity, high = -Infinity;
    for (let i = 0; i < along.length; i++) {
      if (along[i] < low) low = along[i];
      if (along[i] > high) high = along[i];
    }
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

  /* The mean of the months kept in the place of the others: surface.without_months. */
  function withoutMonths(values, kept) {
    const level = mean(values.filter((_, i) => kept[i]));
    return values.map((value, i) => (kept[i] ? value : level));
  }

  /* Which trailing means read kept months only: surface.months_read. */
  function monthsRead(kept, window) {
    const read = new Array(Math.max(0, kept.length - window + 1));
    let lost = 0;
    for (let i = 0; i < kept.length; i++) {
      lost += kept[i] ? 0 : 1;
      if (i >= window) lost -= kept[i - window] ? 0 : 1;
      if (i >= window - 1) read[i - window + 1] = lost === 0;
    }
    return read;
  }

  /* The cell (window, shift); null where too few pairs are left or a side does not vary. `kept` says
     which months may be read, if some may not. `start` is the place of the first driver month in the
     series given, `months` that of each pair. */
  function cell(driver, response, window, shift, minPairs = 24, slices = 8, kept = null) {
    if (kept) {
      if (!kept.includes(true)) return null;
      driver = withoutMonths(driver, kept);
      response = withoutMonths(response, kept);
    }
    const smoothDriver = trailingMean(driver, window);
    const smoothResponse = trailingMean(response, window);
    const from = Math.max(0, -shift);
    let n = Math.max(0, smoothDriver.length - Math.abs(shift));
    let x = smoothDriver.slice(from, from + n);
    let y = smoothResponse.slice(from + shift, from + shift + n);
    let months = new Array(n);
    for (let i = 0; i < n; i++) months[i] = from + window - 1 + i;
    if (kept) {
      const read = monthsRead(kept, window);
      const whole = (_, i) => read[from + i] && read[from + shift + i];
      x = x.filter(whole); y = y.filter(whole); months = months.filter(whole);
      n = x.length;
    }
    if (n < minPairs) return null;
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
      window, shift, n, start: from + window - 1, months, driver: x, response: y,
      slope, intercept, correlation, ellipse,
      seNaive: Math.sqrt(ssr / (n - 2) / sxx),
      driverSlices: sliceMeans(x, y, slices),
      responseSlices: sliceMeans(y, x, slices),
    };
  }

  /* The mean of the other side in a band that sweeps along one: slices.slice_path. */
  function slicePath(along, other, width, steps = 101) {
    const order = Array.from(along.keys()).sort((a, b) => along[a] - along[b]);
    const x = order.map((i) => along[i]), level = mean(other);
    const sums = [0];
    for (const i of order) sums.push(sums[sums.length - 1] + other[i] - level);
    const least = x[0], largest = x[x.length - 1], half = 0.5 * width * (largest - least);
    const path = { low: [], high: [], centre: [], mean: [], count: [], overall: level };
    let first = 0, stop = 0;
    for (let k = 0; k < steps; k++) {
      const centre = least + (largest - least) * (k / (steps - 1));
      const low = centre - half, high = centre + half;
      while (first < x.length && x[first] < low) first += 1;
      while (stop < x.length && x[stop] <= high) stop += 1;
      const count = stop - first;
      path.low.push(low); path.high.push(high); path.centre.push(centre); path.count.push(count);
      path.mean.push(count > 0 ? level + (sums[stop] - sums[first]) / count : null);
    }
    return path;
  }

  function bins(values, number) {
    let least = Infinity, largest = -Infinity;
    for (const value of values) { least = Math.min(least, value); largest = Math.max(largest, value); }
    const place = Array.from(values, (v) => Math.min(number - 1, Math.floor(((v - least) / (largest - least)) * number)));
    return { place, edges: Array.from({ length: number + 1 }, (_, k) => least + ((largest - least) * k) / number) };
  }

  /* Pairs in equal bins of each side, and of both: slices.pair_counts. */
  function pairCounts(driver, response) {
    const number = driver.length >= 240 ? 24 : driver.length >= 96 ? 16 : 8;
    const x = bins(driver, number), y = bins(response, number);
    const both = Array.from({ length: number }, () => new Array(number).fill(0));
    x.place.forEach((column, i) => { both[y.place[i]][column] += 1; });
    return {
      driverEdges: x.edges, responseEdges: y.edges, both,
      driver: both[0].map((_, k) => both.reduce((sum, row) => sum + row[k], 0)),
      response: both.map((row) => row.reduce((sum, n) => sum + n, 0)),
    };
  }

  pricewake.numbers = { trailingMean, cell, slicePath, pairCounts };
})();
