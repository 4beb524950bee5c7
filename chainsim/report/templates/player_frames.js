// Unpacks the recorded moments and reads values between two of them.
// The script files share one function scope; the page wraps them.
const byId = (id) => document.getElementById(id);
const player = byId("player");
if (!player) return;
const scene = JSON.parse(byId("scene").textContent);
const status = byId("player-status");

if (typeof DecompressionStream === "undefined") {
  status.textContent =
    "This browser cannot unpack the motion (it lacks DecompressionStream). " +
    "The still drawings and plots below show the same run; any browser from 2023 on plays it.";
  return;
}

// ---- unpacking: gzip, low bytes then high bytes, differences along time ----
async function unpack() {
  const text = atob(byId("frames").textContent.trim());
  const packed = new Uint8Array(text.length);
  for (let i = 0; i < text.length; i++) packed[i] = text.charCodeAt(i);
  const stream = new Blob([packed]).stream().pipeThrough(new DecompressionStream("gzip"));
  const bytes = new Uint8Array(await new Response(stream).arrayBuffer());
  const frames = scene.time.length;
  const out = {};
  let start = 0;
  for (const channel of scene.channels) {
    const values = channel.series * frames;
    const data = new Uint16Array(values);
    for (let s = 0; s < channel.series; s++) {
      let sum = 0;
      for (let f = 0; f < frames; f++) {
        const k = s * frames + f;
        sum = (sum + bytes[start + k] + 256 * bytes[start + values + k]) & 0xffff;
        data[k] = sum;
      }
    }
    start += 2 * values;
    out[channel.name] = { data: data, low: channel.low, step: channel.step, series: channel.series };
  }
  return out;
}

// ---- reading values at a moment between two recorded frames ----
let store = null;
let now = { frame: 0, next: 0, share: 0, time: scene.time[0] };

function moment(time) {
  const t = scene.time;
  let low = 0;
  let high = t.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (t[middle] <= time) low = middle;
    else high = middle;
  }
  if (t[high] <= time) low = high;
  const next = Math.min(low + 1, t.length - 1);
  const width = t[next] - t[low];
  const share = width > 0 ? Math.min(Math.max((time - t[low]) / width, 0), 1) : 0;
  return { frame: low, next: next, share: share, time: time };
}

function raw(name, series, frame) {
  return store[name].data[series * scene.time.length + frame];
}

function value(name, series) {
  const channel = store[name];
  const a = raw(name, series, now.frame);
  const b = raw(name, series, now.next);
  return channel.low[series % channel.low.length] +
    channel.step[series % channel.step.length] * (a + (b - a) * now.share);
}

function angle(name, series) {
  const a = raw(name, series, now.frame);
  let turn = raw(name, series, now.next) - a;
  if (turn > 32768) turn -= 65536;
  if (turn < -32768) turn += 65536;
  return ((a + turn * now.share) * 2 * Math.PI) / 65536;
}

function frozen(name, series) {
  const channel = store[name];
  return channel.low[series % channel.low.length] +
    channel.step[series % channel.step.length] * raw(name, series, now.frame);
}
