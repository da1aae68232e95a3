"use strict";
// What the page holds: planes of codes, unpacked into numbers; and the few helpers that draw.
const D = JSON.parse(document.getElementById("data").textContent);
const $ = id => document.getElementById(id);
const CELLS = D.columns * D.rows;
const planes = {};

async function inflate(text) {
  const bytes = Uint8Array.from(atob(text), letter => letter.charCodeAt(0));
  const stream = new Blob([bytes]).stream().pipeThrough(new DecompressionStream("deflate"));
  return new Uint8Array(await new Response(stream).arrayBuffer());
}

async function codes(packed) {
  const bytes = await inflate(packed.data);
  if (packed.bytes === 1) return bytes;
  const joined = new Uint16Array(CELLS);
  for (let i = 0; i < CELLS; i++) joined[i] = bytes[i] << 8 | bytes[CELLS + i];
  return joined;
}

async function values(packed) { // code 0 is no value
  const code = await codes(packed), found = new Float32Array(CELLS);
  for (let i = 0; i < CELLS; i++) {
    const steps = code[i] - 1;
    found[i] = steps < 0 ? NaN : packed.kind === "log" ? packed.low * Math.exp(packed.step * steps) : packed.low + packed.step * steps;
  }
  return found;
}

async function unpack() {
  const P = D.planes;
  [planes.thickness, planes.sigma, planes.residual, planes.flags] =
    await Promise.all([values(P.thickness), values(P.sigma), values(P.residual), codes(P.flags)]);
  planes.share = P.share ? await codes(P.share) : null;
  planes.others = [];
  for (const other of P.others) planes.others.push({ nm: await values(other.nm), odds: await values(other.odds) });
}

// Cells and places. A cell holds one pixel of the picture: the page thins, it does not average.
const pixelOf = (column, row) => [D.offset + D.stride * column, D.offset + D.stride * row];
const hold = (value, most) => Math.max(0, Math.min(most, value));
const cellAt = (x, y) => [hold(Math.round((x - D.offset) / D.stride), D.columns - 1), hold(Math.round((y - D.offset) / D.stride), D.rows - 1)];
const toMm = (x, y) => D.to_mm && [D.to_mm[0] * x + D.to_mm[1] * y + D.to_mm[2], D.to_mm[3] * x + D.to_mm[4] * y + D.to_mm[5]];
const uAt = i => Math.hypot(planes.sigma[i], D.u_common_nm);
const isBlocked = i => (planes.flags[i] & D.blocking) !== 0;
const isOutside = i => (planes.flags[i] & D.outside) !== 0;
const isClaimed = i => !isBlocked(i) && planes.thickness[i] === planes.thickness[i];
const flagsAt = i => D.flags.filter(flag => planes.flags[i] & flag.mask);

const sorted = new Map(); // planes, least value first; sorting is what costs
function quantile(plane, level) {
  if (!sorted.has(plane)) sorted.set(plane, plane.filter((value, i) => value === value && !isOutside(i)).sort());
  const kept = sorted.get(plane);
  return kept.length ? kept[Math.round(level * (kept.length - 1))] : NaN;
}
let claimedNm = null, claimedU = null;
const claimedOnly = () => claimedNm ||= planes.thickness.map((nm, i) => isClaimed(i) ? nm : NaN);
const claimedSigma = () => claimedU ||= planes.sigma.map((u, i) => isClaimed(i) ? u : NaN);

// Drawing
const NS = "http://www.w3.org/2000/svg";
function draw(parent, tag, attributes = {}, text = null) {
  const node = document.createElementNS(NS, tag);
  for (const name in attributes) node.setAttribute(name, attributes[name]);
  if (text !== null) node.textContent = text;
  parent.appendChild(node);
  return node;
}
function element(parent, tag, attributes = {}, text = null) {
  const node = document.createElement(tag);
  for (const name in attributes) node.setAttribute(name, attributes[name]);
  if (text !== null) node.textContent = text;
  parent.appendChild(node);
  return node;
}
const triple = hex => [1, 3, 5].map(at => parseInt(hex.slice(at, at + 2), 16));
const LUT = D.scale.map(triple);

function ticks(low, high, most) {
  const span = high - low;
  if (!(span > 0)) return [low];
  const raw = span / most, power = 10 ** Math.floor(Math.log10(raw));
  const step = [1, 2, 5, 10].map(m => m * power).find(s => s >= raw * (1 - 1e-9));
  const found = [];
  for (let k = Math.ceil(low / step - 1e-9); k * step <= high + 1e-9 * span; k++) found.push(k * step);
  return found;
}
const tickText = (value, all) => {
  const step = all.length > 1 ? all[1] - all[0] : 1;
  return value.toFixed(Math.max(0, -Math.floor(Math.log10(step) + 1e-9))).replace(/^-(0(\.0*)?)$/, "$1").replace("-", "\u2212");
};
const signed = value => Math.abs(value) < 0.05 ? "0.0" : (value < 0 ? "\u2212" : "+") + Math.abs(value).toFixed(1);
