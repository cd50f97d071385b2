"use strict";
// Looks up readings made when the report was written; it counts, rounds and interpolates nothing.
for (const node of document.querySelectorAll(".scripted")) node.hidden = false;
for (const box of document.querySelectorAll("[data-curve]")) {
  const data = JSON.parse(box.querySelector("script").textContent);
  const slider = box.querySelector("[type=range]");
  const typed = box.querySelector("[type=number]");
  const said = box.querySelector(".said");
  const cells = [...box.querySelectorAll("[data-read]")];
  const cursor = box.querySelector(".cursor");
  const dots = [...box.querySelectorAll(".dot")];
  const last = data.value.length - 1;
  const show = (step) => {
    const across = data.x[step] + "%";
    cells.forEach((cell, part) => { cell.textContent = data.read[step][part]; });
    cursor.setAttribute("x1", across);
    cursor.setAttribute("x2", across);
    dots.forEach((dot, axis) => {
      dot.setAttribute("cx", across);
      dot.setAttribute("cy", data.y[axis][step] + "%");
    });
    slider.value = step;
    slider.setAttribute("aria-valuetext", data.read[step][0]);
  };
  const settle = (step) => {
    const kept = Math.min(last, Math.max(0, step));
    show(kept);
    typed.value = data.value[kept];
    said.textContent = "";
  };
  const nearest = (value) => {
    let best = 0;
    data.value.forEach((entry, step) => {
      if (Math.abs(entry - value) < Math.abs(data.value[best] - value)) best = step;
    });
    return best;
  };
  const read = () => {
    if (typed.value === "") return;
    const value = Number(typed.value);
    const step = nearest(value);
    show(step);
    const beyond = value < Number(data.value[0]) || value > Number(data.value[last]);
    said.textContent = value === Number(data.value[step]) ? ""
      : (beyond ? "Outside the thresholds computed; shown at " : "Shown at the nearest threshold computed, ") + data.read[step][0] + ".";
  };
  slider.addEventListener("input", () => settle(Number(slider.value)));
  typed.addEventListener("input", read);
  typed.addEventListener("change", () => settle(Number(slider.value)));
  typed.addEventListener("keydown", (event) => {
    const move = { ArrowUp: 1, ArrowDown: -1 }[event.key];
    if (move) {
      event.preventDefault();
      settle(Number(slider.value) + move);
    }
  });
  box.querySelector("button").addEventListener("click", () => settle(data.start));
  settle(data.start);
}
addEventListener("beforeprint", () => {
  for (const node of document.querySelectorAll("details")) node.open = true;
});
