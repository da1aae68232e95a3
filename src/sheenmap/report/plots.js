// The scale, the histogram and the profile: SVG that takes its colours from the style.
const LEFT = 46, RIGHT = 12, TOP = 20, BOTTOM = 34;

function drawScale(layer, low, high) {
  const box = $("scale"), width = box.clientWidth || 560, from = 14, to = width - 22, span = high - low || 1;
  const at = value => from + (to - from) * hold((position(layer, value) - position(layer, low)) / (position(layer, high) - position(layer, low) || 1), 1);
  box.replaceChildren();
  box.setAttribute("viewBox", `0 0 ${width} 54`);
  const fill = draw(draw(box, "defs"), "linearGradient", { id: "ramp" });
  for (let k = 0; k <= 32; k++) draw(fill, "stop", { offset: k / 32, "stop-color": D.scale[Math.round(255 * k / 32)] });
  draw(box, "rect", { x: from, y: 12, width: to - from, height: 15, fill: "url(#ramp)", class: "axis" });
  draw(box, "path", { d: `M${from} 12L${from - 9} 19.5L${from} 27Z`, fill: D.scale[0] });
  draw(box, "path", { d: `M${to} 12L${to + 9} 19.5L${to} 27Z`, fill: D.scale[255] });
  const marks = layer.log ? [0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 50, 100, 200, 500, 1000].filter(v => v >= low && v <= high) : ticks(low, high, 6);
  for (const value of marks) {
    draw(box, "line", { x1: at(value), x2: at(value), y1: 27, y2: 32, class: "axis" });
    draw(box, "text", { x: at(value), y: 44, "text-anchor": "middle" }, layer.log ? String(value) : tickText(value, marks));
  }
  if (layer.unit) draw(box, "text", { x: to + 22, y: 54, "text-anchor": "end", class: "small" }, layer.unit);
  if (layer.name === "thickness" && D.limits) for (const limit of D.limits) if (limit !== null && limit >= low && limit <= high)
    draw(box, "line", { x1: at(limit), x2: at(limit), y1: 6, y2: 33, class: "limit" });
  const here = draw(box, "path", { id: "scale-here", class: "mark" });
  box.setAttribute("aria-label", `Scale of ${layer.title}, ${low.toPrecision(4)} to ${high.toPrecision(4)} ${layer.unit}`);
  return value => here.setAttribute("d", value === value ? `M${at(value)} 11l-5 -9h10Z` : "");
}
const position = (layer, value) => layer.log ? Math.log(value) : value;

function frame(box, x, y, xName, yName) { // axes of a plot; gives back the two mappings
  const width = box.clientWidth || 560, height = box.clientHeight || 230;
  box.replaceChildren();
  box.setAttribute("viewBox", `0 0 ${width} ${height}`);
  const atX = v => LEFT + (width - LEFT - RIGHT) * (v - x[0]) / (x[1] - x[0] || 1);
  const atY = v => height - BOTTOM - (height - TOP - BOTTOM) * (v - y[0]) / (y[1] - y[0] || 1);
  const under = draw(box, "g"), over = draw(box, "g"), xs = ticks(x[0], x[1], Math.max(3, width / 90)), ys = ticks(y[0], y[1], 5);
  for (const v of xs) {
    draw(over, "line", { x1: atX(v), x2: atX(v), y1: height - BOTTOM, y2: height - BOTTOM + 5, class: "axis" });
    draw(over, "text", { x: atX(v), y: height - BOTTOM + 17, "text-anchor": "middle" }, tickText(v, xs));
  }
  for (const v of ys) {
    draw(under, "line", { x1: LEFT, x2: width - RIGHT, y1: atY(v), y2: atY(v), class: "grid" });
    draw(over, "text", { x: LEFT - 6, y: atY(v) + 4, "text-anchor": "end" }, tickText(v, ys));
  }
  draw(over, "line", { x1: LEFT, x2: width - RIGHT, y1: height - BOTTOM, y2: height - BOTTOM, class: "axis" });
  draw(over, "text", { x: width - RIGHT, y: height - 3, "text-anchor": "end", class: "small" }, xName);
  draw(over, "text", { x: 2, y: 11, class: "small" }, yName);
  return { atX, atY, under, over, left: LEFT, right: width - RIGHT, top: TOP, bottom: height - BOTTOM };
}

function histogramSpan() {
  let [low, high] = [quantile(claimedOnly(), 0.001), quantile(claimedOnly(), 0.999)];
  const span = Math.max(high - low, 0.1);
  [low, high] = [low - 0.05 * span, high + 0.05 * span];
  for (const limit of D.limits || []) if (limit !== null && limit > low - 1.5 * span && limit < high + 1.5 * span)
    [low, high] = [Math.min(low, limit - 0.05 * span), Math.max(high, limit + 0.05 * span)];
  return [low, high];
}

function drawHistogram() {
  const box = $("histogram");
  if (!box) return () => {};
  const [low, high] = histogramSpan(), bins = new Float64Array(72);
  let total = 0;
  for (const nm of claimedOnly()) {
    if (nm !== nm) continue;
    total++;
    const bin = Math.floor(bins.length * (nm - low) / (high - low));
    if (bin >= 0 && bin < bins.length) bins[bin]++;
  }
  const share = bins.map(count => 100 * count / Math.max(total, 1)), most = Math.max(...share);
  const plot = frame(box, [low, high], [0, 1.08 * most], "thickness, nm", "% of the claimed area");
  const { atX, atY } = plot, wide = (high - low) / bins.length;
  if (D.limits) {
    const [from, to] = [D.limits[0] ?? low, D.limits[1] ?? high].map(v => hold(v - low, high - low) + low);
    if (to > from) draw(plot.under, "rect", { x: atX(from), width: atX(to) - atX(from), y: plot.top, height: plot.bottom - plot.top, class: "allowed" });
    limitLines(plot, low, high, true);
  }
  share.forEach((value, k) => value && draw(plot.under, "rect", { x: atX(low + k * wide) + 0.4, y: atY(value), width: Math.max(atX(wide) - atX(0) - 0.8, 0.5), height: atY(0) - atY(value), class: "bar" }));
  const here = draw(plot.over, "path", { class: "here" });
  return nm => here.setAttribute("d", nm >= low && nm <= high ? `M${atX(nm)} ${plot.top}V${plot.bottom}` : "");
}

function limitLines(plot, low, high, upright) {
  D.limits.forEach((limit, k) => {
    if (limit === null || limit < low || limit > high) return;
    const [x, y] = [plot.atX(limit), plot.atY(limit)];
    draw(plot.over, "line", upright ? { x1: x, x2: x, y1: plot.top, y2: plot.bottom, class: "limit" } : { x1: plot.left, x2: plot.right, y1: y, y2: y, class: "limit" });
    const words = `${k ? "upper" : "lower"} limit ${+limit.toFixed(2)}`;
    if (upright) draw(plot.over, "text", { x: x + (k ? -4 : 4), y: plot.top + 9, "text-anchor": k ? "end" : "start", class: "small" }, words);
    else draw(plot.over, "text", { x: plot.right, y: y + (k ? -4 : 13), "text-anchor": "end", class: "small" }, words);
  });
}

function drawProfile(line) { // line: [x1, y1, x2, y2] in pixels
  const box = $("profile");
  if (!box) return;
  const [x1, y1, x2, y2] = line, length = Math.hypot(x2 - x1, y2 - y1), steps = hold(Math.round(length / D.stride), 600) || 1;
  const ends = [toMm(x1, y1), toMm(x2, y2)], far = D.to_mm ? Math.hypot(ends[1][0] - ends[0][0], ends[1][1] - ends[0][1]) : length;
  const points = [];
  for (let k = 0; k <= steps; k++) {
    const [column, row] = cellAt(x1 + (x2 - x1) * k / steps, y1 + (y2 - y1) * k / steps), i = row * D.columns + column;
    points.push(isClaimed(i) ? [far * k / steps, planes.thickness[i], uAt(i)] : null);
  }
  const claimed = points.filter(Boolean);
  let [low, high] = [quantile(claimedOnly(), 0.005), quantile(claimedOnly(), 0.995)];
  for (const [, nm, u] of claimed) [low, high] = [Math.min(low, nm - u), Math.max(high, nm + u)];
  const plot = frame(box, [0, far], [low - 0.04 * (high - low || 1), high + 0.04 * (high - low || 1)], D.to_mm ? "along the line, mm" : "along the line, px", "thickness, nm; band: plus or minus u");
  if (D.limits) limitLines(plot, low, high, false);
  let run = [];
  for (const point of [...points, null]) {
    if (point) { run.push(point); continue; }
    if (run.length) drawRun(plot, run);
    run = [];
  }
  const words = claimed.length ? `${claimed.length} of ${points.length} points are claimed; ${Math.min(...claimed.map(p => p[1])).toFixed(2)} to ${Math.max(...claimed.map(p => p[1])).toFixed(2)} nm.` : "Nothing is claimed along this line.";
  $("profile-words").textContent = `From x ${Math.round(x1)}, y ${Math.round(y1)} px to x ${Math.round(x2)}, y ${Math.round(y2)} px: ${words}`;
  box.setAttribute("aria-label", `Thickness along the line. ${words}`);
}

function drawRun({ atX, atY, under, over }, run) {
  const path = shift => run.map(([s, nm, u], k) => `${k ? "L" : "M"}${atX(s).toFixed(1)} ${atY(nm + shift * u).toFixed(1)}`).join("");
  const back = run.slice().reverse().map(([s, nm, u]) => `L${atX(s).toFixed(1)} ${atY(nm - u).toFixed(1)}`).join("");
  draw(under, "path", { d: path(1) + back + "Z", class: "doubt" });
  draw(over, "path", { d: run.length > 1 ? path(0) : path(0) + "h1.5", class: "curve" });
}
