"use strict";
// Reads the section off: a line along the transect, moved by pointer or keyboard, and the way of the air of each site.
// Computes nothing: it looks numbers up that the page carries, and writes them.
(() => {
  const data = JSON.parse(document.getElementById("reading-data").textContent);
  const figure = document.getElementById("figure-section");
  const panel = document.getElementById("reading");
  const along = document.getElementById("reading-place");
  const upward = document.getElementById("reading-path");
  const said = document.getElementById("reading-way");
  const buttons = [...panel.querySelectorAll("button")];
  const forms = [...figure.querySelectorAll("svg")].map((svg) => ({ svg, ruler: svg.querySelector(".ruler") }));
  let kept = null;

  const real = (key, lists, at) => lists[key][at] / 10 ** data.fields[key].digits;

  function written(whole, digits, unit) {
    const text = Math.abs(whole / 10 ** digits).toFixed(Math.max(digits, 0));
    const grouped = text.length > 4 && !text.includes(".") ? text.replace(/\B(?=(\d{3})+$)/, "\u202f") : text;
    return `${whole < 0 ? "\u2212" : ""}${grouped}\u00a0${unit}`;
  }

  function reading(key, lists, at) {
    const field = data.fields[key];
    const text = written(lists[key][at], field.digits, field.unit);
    return field.beside ? `${text}\u00a0(${written(lists[`${key}_beside`][at], field.digits, field.beside)})` : text;
  }

  const edges = (ruler) => Object.fromEntries(Object.entries(ruler.dataset).map(([key, text]) => [key, Number(text)]));

  function drawing(ruler, place, path) {
    const edge = edges(ruler);
    const across = (value) => edge.left + (value - edge.start) / (edge.end - edge.start) * (edge.right - edge.left);
    const down = (value) => edge.bottom + (value - edge.low) / (edge.high - edge.low) * (edge.top - edge.bottom);
    const x = (at) => across(real("across", data.places, at));
    const y = (at) => down(real("up", data.paths[path], at));
    const seen = data.places.across.map((_, at) => y(at) >= edge.top);
    const step = (at) => `${seen[at - 1] ? "L" : "M"}${x(at).toFixed(1)} ${y(at).toFixed(1)}`;
    ruler.querySelector(".ruler-line").setAttribute("transform", `translate(${x(place).toFixed(1)} 0)`);
    ruler.querySelector(".ruler-path").setAttribute("d", seen.map((is, at) => (is ? step(at) : "")).join("") || "M0 0");
    const point = ruler.querySelector(".ruler-point");
    point.setAttribute("cx", x(place).toFixed(1));
    point.setAttribute("cy", Math.max(y(place), edge.top).toFixed(1));
  }

  function show() {
    const place = Number(along.value);
    const path = Number(upward.value);
    const texts = { start: data.starts[path] };
    for (const lists of [data.places, data.paths[path]]) {
      for (const key of Object.keys(data.fields)) if (key in lists) texts[key] = reading(key, lists, place);
    }
    for (const spot of panel.querySelectorAll("[data-field]")) spot.textContent = texts[spot.dataset.field];
    const air = `${texts.temperature}, dew point ${texts.dew_point}, humidity ${texts.humidity}, wind ${texts.wind}`;
    along.setAttribute("aria-valuetext", `${texts.distance}, ground ${texts.ground}; air at ${texts.height}: ${air}`);
    upward.setAttribute("aria-valuetext", `from ${texts.start}, here at ${texts.height}: ${air}`);
    for (const { ruler } of forms) drawing(ruler, place, path);
  }

  function read() {
    figure.classList.add("reading-off");
    show();
  }

  function follow(number) {
    const chosen = number ?? kept;
    for (const way of figure.querySelectorAll(".way")) way.classList.toggle("shown", way.dataset.site === chosen);
    figure.classList.toggle("following", chosen !== null && figure.querySelector(".way.shown") !== null);
    said.textContent = chosen === null ? "" : data.ways[chosen];
  }

  function keep(number) {
    kept = kept === number ? null : number;
    for (const button of buttons) button.setAttribute("aria-pressed", String(button.dataset.site === kept));
    follow(null);
  }

  function nearest(list, wanted) {
    let best = 0;
    for (let at = 1; at < list.length; at += 1) {
      if (Math.abs(list[at] - wanted) < Math.abs(list[best] - wanted)) best = at;
    }
    return best;
  }

  function point(svg, ruler, event) {
    const box = svg.getBoundingClientRect();
    const edge = edges(ruler);
    const x = (event.clientX - box.left) / box.width * svg.viewBox.baseVal.width;
    const y = (event.clientY - box.top) / box.height * svg.viewBox.baseVal.height;
    const distance = edge.start + (x - edge.left) / (edge.right - edge.left) * (edge.end - edge.start);
    along.value = String(nearest(data.places.across.map((_, at) => real("across", data.places, at)), distance));
    if (y <= edge.bottom) {
      const height = edge.low + (y - edge.bottom) / (edge.top - edge.bottom) * (edge.high - edge.low);
      upward.value = String(nearest(data.paths.map((path) => real("up", path, Number(along.value))), height));
    }
    read();
  }

  for (const { svg, ruler } of forms) {
    for (const kind of ["pointermove", "pointerdown"]) svg.addEventListener(kind, (event) => point(svg, ruler, event));
    for (const pin of svg.querySelectorAll(".pin")) {
      pin.addEventListener("pointerenter", () => follow(pin.dataset.site));
      pin.addEventListener("pointerleave", () => follow(null));
    }
  }
  for (const slider of [along, upward]) {
    slider.addEventListener("input", read);
    slider.addEventListener("focus", read);
  }
  for (const button of buttons) {
    const number = button.dataset.site;
    for (const kind of ["pointerenter", "focus"]) button.addEventListener(kind, () => follow(number));
    for (const kind of ["pointerleave", "blur"]) button.addEventListener(kind, () => follow(null));
    button.addEventListener("click", () => keep(number));
  }
  panel.hidden = false;
  show();
})();
