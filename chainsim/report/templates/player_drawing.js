// ---- drawing ----
const nPins = scene.pins;
const INK = "#17232b";
const FAINT = "#5c6a72";

function pinAt(i) {
  return [value("pins", 2 * i), value("pins", 2 * i + 1)];
}

function ballAt(slot) {
  const number = raw("ball_number", slot, now.frame);
  if (number === 65535) return null;
  const read = raw("ball_number", slot, now.next) === number ? value : frozen;
  return {
    number: number,
    at: [read("balls", 2 * slot), read("balls", 2 * slot + 1)],
    angle: angle("ball_angle", slot),
    state: raw("ball_state", slot, now.frame),
  };
}

function fitCanvas(canvas) {
  const ratio = window.devicePixelRatio || 1;
  const box = canvas.getBoundingClientRect();
  const width = Math.max(Math.round(box.width * ratio), 1);
  const height = Math.max(Math.round(box.height * ratio), 1);
  if (canvas.width !== width || canvas.height !== height) {
    canvas.width = width;
    canvas.height = height;
  }
  return ratio;
}

function projection(canvas, box) {
  const pad = 10 * (window.devicePixelRatio || 1);
  const scale = Math.min(
    (canvas.width - 2 * pad) / (box[2] - box[0]), (canvas.height - 2 * pad) / (box[3] - box[1]));
  const middle = [(box[0] + box[2]) / 2, (box[1] + box[3]) / 2];
  const side = scene.mirror ? -1 : 1;
  return {
    scale: scale,
    side: side,
    x: (p) => canvas.width / 2 + side * scale * (p[0] - middle[0]),
    y: (p) => canvas.height / 2 - scale * (p[1] - middle[1]),
  };
}

function trace(context, view, points, closed) {
  context.beginPath();
  points.forEach((p, k) => {
    if (k === 0) context.moveTo(view.x(p), view.y(p));
    else context.lineTo(view.x(p), view.y(p));
  });
  if (closed) context.closePath();
}

function disc(context, view, at, radius) {
  context.beginPath();
  context.arc(view.x(at), view.y(at), Math.max(radius, 0.5), 0, 2 * Math.PI);
}

function drawStanding(context, view, ratio) {
  context.setLineDash([]);
  context.lineCap = "round";
  context.lineWidth = 2 * ratio;
  context.strokeStyle = FAINT;
  for (const line of scene.standing) {
    trace(context, view, line.points, false);
    context.stroke();
  }
}

function drawSprocket(context, view, ratio, wheel, index) {
  const center = [value("centers", 2 * index), value("centers", 2 * index + 1)];
  const turn = angle("angles", index);
  const c = Math.cos(turn);
  const s = Math.sin(turn);
  const place = (p) => [center[0] + c * p[0] - s * p[1], center[1] + s * p[0] + c * p[1]];
  context.lineWidth = ratio;
  context.strokeStyle = FAINT;
  context.fillStyle = "#e4e9ea";
  trace(context, view, wheel.outline.map(place), true);
  context.fill();
  context.stroke();
  trace(context, view, [center, place([0.8 * wheel.radius, 0])], false);
  context.stroke();
  disc(context, view, center, 0.16 * wheel.radius * view.scale);
  context.fillStyle = INK;
  context.fill();
  if (wheel.moves) drawTravel(context, view, ratio, wheel, center);
  if (wheel.weight) drawWeight(context, view, ratio, wheel, index, center);
}

function drawTravel(context, view, ratio, wheel, center) {
  const size = 5 * ratio;
  const x = view.x(wheel.home);
  const y = view.y(wheel.home);
  context.strokeStyle = INK;
  context.setLineDash([]);
  context.beginPath();
  context.moveTo(x - size, y);
  context.lineTo(x + size, y);
  context.moveTo(x, y - size);
  context.lineTo(x, y + size);
  context.stroke();
  if (!wheel.hangs) return;
  const half = 0.55 * wheel.radius;
  const low = center[1] - 1.7 * wheel.radius;
  context.fillStyle = "#c9d0d3";
  trace(context, view, [center, [center[0], low]], false);
  context.stroke();
  trace(context, view, [
    [center[0] - half, low], [center[0] + half, low],
    [center[0] + half, low - half], [center[0] - half, low - half]], true);
  context.fill();
  context.stroke();
}

function drawWeight(context, view, ratio, wheel, index, center) {
  const x = wheel.home[0] + 2.6 * wheel.radius;
  const top = wheel.home[1] + 2.2 * wheel.radius;
  const y = wheel.home[1] - 1.5 * wheel.radius - value("weights", index);
  const half = 0.5 * wheel.radius;
  context.strokeStyle = INK;
  context.fillStyle = "#c9d0d3";
  context.lineWidth = ratio;
  trace(context, view, [center, [center[0], top], [x, top], [x, y]], false);
  context.stroke();
  trace(context, view, [[x - half, y], [x + half, y], [x + half, y - 2 * half], [x - half, y - 2 * half]], true);
  context.fill();
  context.stroke();
}

function drawChain(context, view, ratio, pins) {
  const look = scene.tension;
  const groups = look.colors.map(() => []);
  const pushing = [];
  for (let i = 0; i < nPins; i++) {
    const tension = value("tension", i);
    if (tension < 0) pushing.push(i);
    else {
      const share = tension / look.top;
      groups[Math.min(Math.floor(share * groups.length), groups.length - 1)].push(i);
    }
  }
  const line = (links) => {
    context.beginPath();
    for (const i of links) {
      const a = pins[i];
      const b = pins[(i + 1) % nPins];
      context.moveTo(view.x(a), view.y(a));
      context.lineTo(view.x(b), view.y(b));
    }
    context.stroke();
  };
  context.lineCap = "butt";
  groups.forEach((links, k) => {
    context.strokeStyle = look.colors[k];
    context.lineWidth = look.widths[k] * ratio;
    line(links);
  });
  context.strokeStyle = INK;
  context.lineWidth = 1.6 * ratio;
  context.setLineDash([3 * ratio, 2.2 * ratio]);
  line(pushing);
  context.setLineDash([]);
  const size = scene.roller * view.scale;
  if (size > 3 * ratio) {
    context.fillStyle = "#ffffff";
    context.strokeStyle = INK;
    context.lineWidth = ratio;
    for (const pin of pins) {
      disc(context, view, pin, size);
      context.fill();
      context.stroke();
    }
  }
  return pushing.length;
}

function onLink(pins, link, points) {
  const a = pins[link];
  const b = pins[(link + 1) % nPins];
  const length = Math.hypot(b[0] - a[0], b[1] - a[1]) || 1;
  const t = [(b[0] - a[0]) / length, (b[1] - a[1]) / length];
  return points.map((p) => [a[0] + p[0] * t[0] + p[1] * t[1], a[1] + p[0] * t[1] - p[1] * t[0]]);
}

function drawCarriers(context, view, ratio, pins) {
  context.strokeStyle = INK;
  context.lineWidth = 1.5 * ratio;
  context.lineJoin = "round";
  for (const carrier of scene.carriers) {
    trace(context, view, onLink(pins, carrier.link, scene.pockets[carrier.pocket]), false);
    context.stroke();
  }
}

function drawHeldBalls(context, view, ratio, pins) {
  if (!scene.held) return 0;
  let count = 0;
  context.lineWidth = 1.3 * ratio;
  context.strokeStyle = INK;
  context.fillStyle = "#f4ead6";
  scene.carriers.forEach((carrier, k) => {
    const loaded = raw("loaded", k, now.frame);
    if (!loaded) return;
    count += loaded;
    disc(context, view, onLink(pins, carrier.link, [scene.held])[0], scene.ball * view.scale);
    context.fill();
    context.stroke();
  });
  return count;
}

function drawBalls(context, view, ratio) {
  let count = 0;
  context.lineWidth = 1.3 * ratio;
  for (let slot = 0; slot < scene.slots; slot++) {
    const ball = ballAt(slot);
    if (!ball) continue;
    count += ball.state === 3 ? 1 : 0;
    const r = scene.ball * view.scale;
    disc(context, view, ball.at, r);
    context.fillStyle = ball.state === 3 ? "#f4ead6" : "#ffffff";
    context.fill();
    context.strokeStyle = INK;
    context.stroke();
    if (r > 3 * ratio) {
      const c = Math.cos(ball.angle);
      const s = Math.sin(ball.angle);
      const radius = scene.ball;
      trace(context, view, [ball.at, [ball.at[0] + radius * c, ball.at[1] + radius * s]], false);
      context.stroke();
    }
    if (scene.lost[ball.number] !== undefined && now.time >= scene.lost[ball.number]) {
      trace(context, view, [[ball.at[0] - scene.ball, ball.at[1] - scene.ball],
        [ball.at[0] + scene.ball, ball.at[1] + scene.ball]], false);
      context.stroke();
      trace(context, view, [[ball.at[0] - scene.ball, ball.at[1] + scene.ball],
        [ball.at[0] + scene.ball, ball.at[1] - scene.ball]], false);
      context.stroke();
    }
  }
  return count;
}

function targetPlace(pins) {
  if (!target) return null;
  if (target.kind === "sprocket") {
    return [value("centers", 2 * target.index), value("centers", 2 * target.index + 1)];
  }
  if (target.kind === "link") {
    const a = pins[target.index % nPins];
    const b = pins[(target.index + 1) % nPins];
    return [(a[0] + b[0]) / 2, (a[1] + b[1]) / 2];
  }
  if (target.kind === "ball") {
    for (let slot = 0; slot < scene.slots; slot++) {
      const ball = ballAt(slot);
      if (ball && ball.number === target.index) return ball.at;
    }
  }
  return null;
}

function drawRing(context, view, ratio, place) {
  if (!place) return;
  context.strokeStyle = "#9c2f1f";
  context.lineWidth = 1.8 * ratio;
  context.setLineDash([5 * ratio, 3 * ratio]);
  disc(context, view, place, Math.max(1.6 * scene.pitch * view.scale, 12 * ratio));
  context.stroke();
  context.setLineDash([]);
}

function drawScaleBar(context, canvas, view, ratio) {
  const wanted = (0.3 * canvas.width) / view.scale;
  const power = Math.pow(10, Math.floor(Math.log10(wanted)));
  const length = [5, 2, 1].map((k) => k * power).find((l) => l <= wanted) || power;
  const x = 10 * ratio;
  const y = canvas.height - 9 * ratio;
  context.strokeStyle = INK;
  context.fillStyle = INK;
  context.lineWidth = ratio;
  context.beginPath();
  context.moveTo(x, y - 4 * ratio);
  context.lineTo(x, y);
  context.lineTo(x + length * view.scale, y);
  context.lineTo(x + length * view.scale, y - 4 * ratio);
  context.stroke();
  context.font = 11 * ratio + "px sans-serif";
  context.fillText(Math.round(length * 1e4) / 10 + " mm", x + 3 * ratio, y - 5 * ratio);
}

function drawView(canvas, box, pins, place) {
  const ratio = fitCanvas(canvas);
  const context = canvas.getContext("2d");
  context.setTransform(1, 0, 0, 1, 0, 0);
  context.fillStyle = "#ffffff";
  context.fillRect(0, 0, canvas.width, canvas.height);
  const view = projection(canvas, box);
  drawStanding(context, view, ratio);
  scene.sprockets.forEach((wheel, k) => drawSprocket(context, view, ratio, wheel, k));
  const pushing = drawChain(context, view, ratio, pins);
  drawCarriers(context, view, ratio, pins);
  const aboard = drawHeldBalls(context, view, ratio, pins) + drawBalls(context, view, ratio);
  drawRing(context, view, ratio, place);
  drawScaleBar(context, canvas, view, ratio);
  return { pushing: pushing, aboard: aboard };
}

function closeUpBox(pins, place) {
  const chosen = closeUp.value;
  const size = 5.5 * scene.pitch;
  let middle = place;
  if (chosen !== "mark" || !middle) {
    const k = chosen === "mark" ? 0 : Number(chosen);
    const reach = Math.max(size, 1.9 * scene.sprockets[k].radius);
    middle = [value("centers", 2 * k), value("centers", 2 * k + 1)];
    return [middle[0] - reach, middle[1] - reach, middle[0] + reach, middle[1] + reach];
  }
  return [middle[0] - size, middle[1] - size, middle[0] + size, middle[1] + size];
}
