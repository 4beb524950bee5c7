// ---- controls ----
const whole = byId("canvas-whole");
const detail = byId("canvas-detail");
const playButton = byId("play");
const slider = byId("timeline");
const speed = byId("speed");
const closeUp = byId("closeup");
const readouts = byId("readouts");
const first = scene.time[0];
const last = scene.time[scene.time.length - 1];
let playing = false;
let target = null;
let clock = 0;

const seconds = (t) => t.toFixed(3) + " s";

function show() {
  const pins = [];
  for (let i = 0; i < nPins; i++) pins.push(pinAt(i));
  const place = targetPlace(pins);
  const counts = drawView(whole, scene.view, pins, place);
  drawView(detail, closeUpBox(pins, place), pins, place);
  slider.value = String(Math.round((now.time - first) * 1000));
  slider.setAttribute("aria-valuetext", seconds(now.time) + " of " + seconds(last));
  const lines = [["Time", seconds(now.time)]];
  scene.readouts.forEach((entry, k) => {
    lines.push([entry.label, (value("readouts", k) * entry.factor).toFixed(entry.digits).replace("-", "\u2212") + " " + entry.unit]);
  });
  if (scene.slots || scene.held) lines.push(["Balls seated", String(counts.aboard)]);
  lines.push(["Links that push", String(counts.pushing)]);
  lines.forEach((line, k) => {
    let row = readouts.children[k];
    if (!row) {
      row = document.createElement("div");
      row.append(document.createElement("dt"), document.createElement("dd"));
      readouts.append(row);
    }
    if (row.children[0].textContent !== line[0]) row.children[0].textContent = line[0];
    row.children[1].textContent = line[1];
  });
  player.dataset.time = now.time.toFixed(4);
}

function goTo(time) {
  now = moment(Math.min(Math.max(time, first), last));
  show();
}

function setPlaying(on) {
  playing = on;
  playButton.textContent = on ? "Pause" : "Play";
  if (on) {
    if (now.time >= last) goTo(first);
    clock = performance.now();
    requestAnimationFrame(advance);
  }
}

function advance(stamp) {
  if (!playing) return;
  const passed = Math.min(Math.max(stamp - clock, 0), 250) / 1000;
  clock = stamp;
  goTo(now.time + passed * Number(speed.value));
  if (now.time >= last) setPlaying(false);
  else requestAnimationFrame(advance);
}

function step(direction) {
  setPlaying(false);
  let frame = now.frame + direction;
  if (direction < 0 && now.share > 1e-6) frame = now.frame;
  frame = Math.min(Math.max(frame, 0), scene.time.length - 1);
  goTo(scene.time[frame]);
}

function jump(mark) {
  setPlaying(false);
  target = mark.target;
  if (target) closeUp.value = target.kind === "sprocket" ? String(target.index) : "mark";
  goTo(mark.time);
  status.textContent = "At " + seconds(mark.time) + ": " + mark.label;
}

function nextMark(direction) {
  const ahead = scene.marks.filter((m) => direction * (m.time - now.time) > 5e-4);
  if (ahead.length) jump(direction > 0 ? ahead[0] : ahead[ahead.length - 1]);
}

function changeSpeed(direction) {
  const chosen = speed.selectedIndex + direction;
  if (chosen >= 0 && chosen < speed.options.length) speed.selectedIndex = chosen;
}

const keys = {
  " ": () => setPlaying(!playing),
  k: () => setPlaying(!playing),
  ArrowLeft: () => step(-1),
  ArrowRight: () => step(1),
  Home: () => goTo(first),
  End: () => goTo(last),
  n: () => nextMark(1),
  b: () => nextMark(-1),
  "+": () => changeSpeed(1),
  "-": () => changeSpeed(-1),
};

function onKey(event) {
  if (event.ctrlKey || event.altKey || event.metaKey) return;
  const own = event.target.tagName;
  if (own === "SELECT") return;
  if (own === "BUTTON" && (event.key === " " || event.key === "Enter")) return;
  const act = keys[event.key];
  if (!act) return;
  event.preventDefault();
  act();
}

function connect() {
  playButton.addEventListener("click", () => setPlaying(!playing));
  byId("step-back").addEventListener("click", () => step(-1));
  byId("step-on").addEventListener("click", () => step(1));
  byId("to-start").addEventListener("click", () => { setPlaying(false); goTo(first); });
  slider.addEventListener("input", () => { setPlaying(false); goTo(first + Number(slider.value) / 1000); });
  closeUp.addEventListener("change", show);
  window.addEventListener("resize", show);
  player.addEventListener("keydown", onKey);
  for (const button of document.querySelectorAll("[data-mark]")) {
    button.addEventListener("click", () => {
      jump(scene.marks[Number(button.dataset.mark)]);
      player.scrollIntoView({ block: "start" });
    });
    button.disabled = false;
  }
  for (const control of player.querySelectorAll("button, input, select")) control.disabled = false;
}

unpack().then((channels) => {
  store = channels;
  connect();
  goTo(first);
  status.textContent = "Ready: " + scene.time.length + " recorded moments from " +
    seconds(first) + " to " + seconds(last) + ".";
  player.dataset.ready = "yes";
}, () => {
  status.textContent = "The motion could not be unpacked. The still drawings and plots below show the same run.";
});
