// The two pictures in one coordinate system, their layers and their pointer.
const BELOW = "#e69f00", ABOVE = "#0072b2", WITHIN = "#d9d4c7", NEAR = "#8d8577", CLEAR = "#b9cdd3";
const SURE = 1.645; // standard uncertainties: one-sided 95 %
const LAYERS = [
  { name: "thickness", title: "Thickness", unit: "nm", plane: "thickness", words: "Thickness in nm; hatched: not claimed" },
  { name: "sigma", title: "Uncertainty", unit: "nm", plane: "sigma", words: "Standard uncertainty of each pixel alone in nm; hatched: not claimed" },
  { name: "tolerance", title: "Tolerance", key: "tolerance", words: "Each pixel against the limits, with its uncertainty; hatched: not claimed" },
  { name: "flags", title: "Flags", key: "flags", words: "Flags; a pixel with several has the colour of the first that blocks" },
  { name: "residual", title: "Residual", unit: "", plane: "residual", log: true, words: "What the fit leaves over, about 1 on a clean film; hatched: no fit" },
  { name: "photo", title: "Photograph", words: "The photograph again" },
].filter(layer => (D.has_map || ["flags", "residual", "photo"].includes(layer.name)) && (layer.name !== "tolerance" || D.limits));
const canvas = $("map"), context = canvas.getContext("2d");
const stages = [$("photo-stage"), $("map-stage")];
let layer = LAYERS[0], at = [D.columns >> 1, D.rows >> 1], line = null, lineStart = null, lit = -1;
let markScale = () => {}, markHistogram = () => {}, speaking = 0, span = [0, 1];

function spans() { // what the colour scale can run over, for this layer
  if (layer.name === "thickness") {
    const all = [quantile(claimedOnly(), 0), quantile(claimedOnly(), 1)], P = D.percentiles;
    const found = { "1 to 99 % of the area": [P["1"], P["99"]], "least to most": all };
    if (D.limits && D.limits.every(limit => limit !== null)) found["tolerance limits"] = D.limits;
    return found;
  }
  if (layer.name === "sigma") {
    const most = quantile(claimedSigma(), 0.99);
    return { "0 to 99 % of the area": [0, most], "least to most": [quantile(claimedSigma(), 0), quantile(claimedSigma(), 1)] };
  }
  return { "0.1 to 30": [0.1, 30] };
}
const widened = ([low, high]) => high > low ? [low, high] : [low - 0.5, high + 0.5];

function colourOf(i) { // the colour of a cell, or null where the hatching shows
  if (isOutside(i)) return OUTSIDE;
  if (layer.name === "flags") return flagColour(i);
  if (layer.name === "tolerance") return isClaimed(i) ? toleranceColour(i) : null;
  const value = planes[layer.plane][i];
  if (value !== value || (layer.name !== "residual" && !isClaimed(i))) return null;
  const share = (position(layer, value) - position(layer, span[0])) / (position(layer, span[1]) - position(layer, span[0]));
  return LUT[Math.round(255 * hold(share, 1))];
}
const FLAG_RGB = D.flags.map(flag => triple(flag.colour)), CLEAR_RGB = triple(CLEAR);
let OUTSIDE = [226, 222, 213];
function flagColour(i) {
  const first = D.flags.findIndex(flag => flag.blocks && planes.flags[i] & flag.mask);
  const shown = first >= 0 ? first : D.flags.findIndex(flag => planes.flags[i] & flag.mask);
  return shown >= 0 ? FLAG_RGB[shown] : CLEAR_RGB;
}
const TOLERANCE_RGB = [BELOW, NEAR, WITHIN, ABOVE].map(triple);
function toleranceColour(i) {
  const nm = planes.thickness[i], guard = SURE * uAt(i), [low, high] = [D.limits[0] ?? -Infinity, D.limits[1] ?? Infinity];
  return TOLERANCE_RGB[nm < low - guard ? 0 : nm > high + guard ? 3 : nm >= low + guard && nm <= high - guard ? 2 : 1];
}

function paint() {
  canvas.width = D.columns; canvas.height = D.rows;
  canvas.style.width = 100 * D.columns * D.stride / D.width + "%";
  canvas.style.height = 100 * D.rows * D.stride / D.height + "%";
  canvas.style.imageRendering = stages[1].clientWidth * devicePixelRatio > 1.3 * D.columns ? "pixelated" : "auto";
  if (layer.name === "photo") return context.drawImage($("photo"), 0, 0, D.width / D.stride, D.height / D.stride);
  OUTSIDE = triple(getComputedStyle(document.documentElement).getPropertyValue("--outside").trim());
  const image = context.createImageData(D.columns, D.rows), out = image.data, thins = planes.share && !["flags", "residual"].includes(layer.name);
  for (let i = 0, k = 0; i < CELLS; i++, k += 4) {
    const colour = colourOf(i);
    if (!colour) continue;
    out[k] = colour[0]; out[k + 1] = colour[1]; out[k + 2] = colour[2];
    out[k + 3] = thins && !isOutside(i) ? planes.share[i] : 255; // the part of a cell that is not claimed lets the hatching through
  }
  context.putImageData(image, 0, 0);
}

function showKey() {
  const rows = layer.key === "tolerance"
    ? [[WITHIN, "within the limits"], [NEAR, "within 1.645 u of a limit: open"], [BELOW, "below"], [ABOVE, "above"]]
    : layer.key === "flags" ? [...(D.has_map ? [[CLEAR, "claimed, no flag"]] : []), ...D.flags.filter((flag, k) => k && planes.flags.some(f => f & flag.mask)).map(flag => [flag.colour, flag.name])] : [];
  if (layer.key === "tolerance") rows.push([null, "not claimed"]);
  $("key").replaceChildren();
  for (const [colour, words] of rows) {
    const item = element($("key"), "li"), swatch = element(item, "i", { class: colour ? "swatch" : "swatch hatched" });
    if (colour) swatch.style.background = colour;
    item.append(words);
  }
  $("key").hidden = !rows.length;
}

function showLayer() {
  const choices = layer.plane ? spans() : null;
  if (choices) {
    const wanted = $("span").value in choices ? $("span").value : Object.keys(choices)[0];
    $("span").replaceChildren(...Object.keys(choices).map(name => new Option(name, name, false, name === wanted)));
    span = widened(choices[wanted]);
  }
  document.querySelector(".scalebox").hidden = !choices;
  $("span-label").hidden = !choices || Object.keys(choices).length < 2;
  $("caption").textContent = layer.words;
  markScale = choices ? drawScale(layer, ...span) : () => {};
  showKey(); paint(); point(...at);
}

// The pointer
function point(column, row, speak = false) {
  at = [hold(column, D.columns - 1), hold(row, D.rows - 1)];
  const i = at[1] * D.columns + at[0], [x, y] = pixelOf(...at), mm = toMm(x, y), raised = flagsAt(i), claimed = isClaimed(i);
  $("r-px").textContent = `x ${x}, y ${y} px`;
  $("r-mm").textContent = mm ? `${signed(mm[0])}, ${signed(mm[1])} mm` : "";
  $("r-nm").textContent = claimed ? `${planes.thickness[i].toFixed(2)} nm` : "not claimed";
  $("r-u").textContent = claimed ? `\u00b1 ${uAt(i).toFixed(2)} nm (u; this pixel alone ${planes.sigma[i].toFixed(2)})` : "";
  $("r-flags").textContent = raised.length ? raised.map(flag => `${flag.name}: ${flag.meaning}`).join("; ") : "none";
  const others = planes.others.map(other => [other.nm[i], other.odds[i]]).filter(([nm]) => nm === nm);
  $("r-others-cell").hidden = !planes.others.length;
  $("r-others").textContent = others.length ? others.map(([nm, odds]) => `${nm.toFixed(1)} nm (odds ${(100 * odds).toFixed(0)} %)`).join(", ") : "none";
  const gap = 8 * D.width / (stages[0].clientWidth || 600);
  const hairs = `M${x} -0.5V${y - gap}M${x} ${y + gap}V${D.height - 0.5}M-0.5 ${y}H${x - gap}M${x + gap} ${y}H${D.width - 0.5}`;
  for (const stage of stages) {
    stage.querySelectorAll(".hair, .hair-edge").forEach(path => path.setAttribute("d", hairs));
  }
  const value = layer.plane && (layer.name === "residual" || claimed) ? planes[layer.plane][i] : NaN;
  markScale(value);
  markHistogram(claimed ? planes.thickness[i] : NaN);
  if (!line && D.has_map) drawProfile(acrossRow());
  clearTimeout(speaking);
  if (speak) speaking = setTimeout(() => { $("spoken").textContent = ["r-px", "r-mm", "r-nm", "r-u", "r-flags"].map(id => $(id).textContent).join(", "); }, 300);
}

function setLine(next) {
  line = next;
  $("clear").hidden = !line;
  for (const path of document.querySelectorAll(".rule, .rule-edge")) path.setAttribute("d", line ? `M${line[0]} ${line[1]}L${line[2]} ${line[3]}` : "");
  if (D.has_map) drawProfile(line || acrossRow());
}
function acrossRow() { // through the pointer, from one end of the region to the other
  const first = at[1] * D.columns, y = pixelOf(...at)[1];
  let [left, right] = [0, D.columns - 1];
  while (left < right && isOutside(first + left)) left++;
  while (left < right && isOutside(first + right)) right--;
  return left < right ? [pixelOf(left, 0)[0], y, pixelOf(right, 0)[0], y] : [0, y, D.width - 1, y];
}

function placeOf(stage, event) {
  const box = stage.getBoundingClientRect();
  return [(event.clientX - box.left) / box.width * D.width - 0.5, (event.clientY - box.top) / box.height * D.height - 0.5];
}

function listen(stage) {
  let from = null;
  stage.addEventListener("pointerdown", event => {
    const place = placeOf(stage, event);
    point(...cellAt(...place), true);
    const draws = event.pointerType === "mouse" || $("draw").getAttribute("aria-pressed") === "true";
    from = draws && event.button === 0 ? [...place, event.clientX, event.clientY] : null;
    if (draws) stage.setPointerCapture(event.pointerId);
  });
  stage.addEventListener("pointermove", event => {
    const place = placeOf(stage, event);
    point(...cellAt(...place));
    lightSite(nearSite(...place), true);
    if (from && event.buttons && Math.hypot(event.clientX - from[2], event.clientY - from[3]) > 6)
      setLine([from[0], from[1], hold(place[0], D.width - 1), hold(place[1], D.height - 1)]);
  });
  stage.addEventListener("pointerup", () => { from = null; });
  stage.addEventListener("pointerleave", () => lightSite(-1));
  stage.addEventListener("keydown", key);
}

function key(event) {
  const step = event.shiftKey ? 10 : 1, [column, row] = at;
  const moves = { ArrowLeft: [column - step, row], ArrowRight: [column + step, row], ArrowUp: [column, row - step], ArrowDown: [column, row + step], Home: [0, row], End: [D.columns - 1, row] };
  if (event.key in moves) point(...moves[event.key], true);
  else if (event.key.toLowerCase() === "l") {
    const place = pixelOf(...at);
    if (lineStart) setLine([...lineStart, ...place]);
    lineStart = lineStart ? null : place;
    $("spoken").textContent = lineStart ? "Line starts here; move and press L again." : $("profile-words")?.textContent || "";
  } else if (event.key === "Escape") { lineStart = null; setLine(null); }
  else return;
  event.preventDefault();
}

// Sites
function nearSite(x, y) {
  if (!$("show-sites").checked) return -1;
  const reach = 9 * D.width / (stages[0].clientWidth || 1);
  let best = -1, least = Infinity;
  D.sites.forEach((site, k) => {
    const far = Math.hypot(site.x - x, site.y - y) - site.r;
    if (far < reach && far < least) [best, least] = [k, far];
  });
  return best;
}
function lightSite(k, scrolls = false) {
  if (k === lit) return;
  lit = k;
  document.querySelectorAll("[data-site]").forEach(node => node.classList.toggle("lit", +node.dataset.site === k));
  const row = scrolls && k >= 0 && document.querySelector(`tr[data-site="${k}"]`);
  if (row) $("site-box").scrollTop = row.offsetTop - $("site-box").clientHeight / 2;
}

function overlay(stage) {
  const over = stage.querySelector(".over");
  over.setAttribute("viewBox", `-0.5 -0.5 ${D.width} ${D.height}`);
  over.setAttribute("preserveAspectRatio", "none");
  const group = draw(over, "g", { class: "spots" }), least = 3 * D.width / (stage.clientWidth || 600);
  for (const kind of ["spot-edge", "spot"]) D.sites.forEach((site, k) =>
    draw(group, "circle", { cx: site.x, cy: site.y, r: Math.max(site.r, least), class: kind + (site.nm === null ? " empty" : ""), "data-site": k }));
  for (const kind of ["rule-edge", "rule", "hair-edge", "hair"]) draw(over, "path", { class: kind });
}

function begin() {
  for (const choice of LAYERS) {
    const label = element($("layers"), "label"), input = element(label, "input", { type: "radio", name: "layer", value: choice.name });
    element(label, "span", {}, choice.title);
    input.checked = choice === layer;
    input.addEventListener("change", () => { layer = choice; showLayer(); });
  }
  stages.forEach(stage => { overlay(stage); listen(stage); });
  $("span").addEventListener("change", showLayer);
  $("show-sites").addEventListener("change", event => document.querySelectorAll(".spots").forEach(group => { group.style.display = event.target.checked ? "" : "none"; }));
  if (!D.sites.length) $("show-sites").parentNode.hidden = true;
  $("draw").addEventListener("click", () => {
    const on = $("draw").getAttribute("aria-pressed") !== "true";
    $("draw").setAttribute("aria-pressed", on);
    stages.forEach(stage => stage.classList.toggle("drawing", on));
  });
  $("clear").addEventListener("click", () => setLine(null));
  document.querySelectorAll("tr[data-site]").forEach(row => {
    const show = () => lightSite(+row.dataset.site), site = D.sites[+row.dataset.site];
    row.addEventListener("pointerenter", show);
    row.addEventListener("pointerleave", () => lightSite(-1));
    row.querySelector("button").addEventListener("focus", show);
    row.querySelector("button").addEventListener("click", () => point(...cellAt(site.x, site.y), true));
  });
  if (!D.has_map) { $("draw").hidden = true; $("keys").textContent = "Arrow keys move the pointer (Shift: ten steps)."; }
  addEventListener("resize", refresh);
  matchMedia("(prefers-color-scheme: dark)").addEventListener("change", showTheme);
  addEventListener("beforeprint", () => { document.documentElement.dataset.theme = "light"; refresh(); });
  addEventListener("afterprint", () => { setTheme(theme); });
  refresh();
}

function refresh() {
  markHistogram = drawHistogram();
  showLayer();
  if (line) setLine(line);
}

// Light and dark
let theme = null; // as the system has it, until the button is pressed
const isDark = () => theme ? theme === "dark" : matchMedia("(prefers-color-scheme: dark)").matches;
function setTheme(next) {
  theme = next;
  if (theme) document.documentElement.dataset.theme = theme; else delete document.documentElement.dataset.theme;
  showTheme();
}
function showTheme() {
  $("theme").textContent = isDark() ? "Light" : "Dark";
  $("theme").setAttribute("aria-label", isDark() ? "Light colours" : "Dark colours");
  if (planes.flags) refresh();
}
$("theme").removeAttribute("aria-pressed");
$("theme").addEventListener("click", () => setTheme(isDark() ? "light" : "dark"));
showTheme();

unpack().then(() => $("photo").decode().catch(() => null)).then(begin).then(() => { document.documentElement.dataset.ready = "yes"; }).catch(error => {
  $("broken").textContent = `The pictures could not be drawn (${error.message}); numbers and tables are whole. A browser from 2023 or later can.`;
  $("broken").hidden = false;
  console.error(error);
});
