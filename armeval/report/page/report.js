"use strict";
// The linked view: one place on the path, shown on every strip, on the path and on the arm.
(() => {
  const SVG = "http://www.w3.org/2000/svg";
  const data = JSON.parse(document.getElementById("linked").textContent);
  const whole = [0, JSON.parse(document.querySelector("svg.strip").dataset.span)];
  const readOut = document.getElementById("read-out");
  let range = whole, place = 0;

  const add = (parent, tag, attributes) => {
    const made = document.createElementNS(SVG, tag);
    for (const [name, value] of Object.entries(attributes)) made.setAttribute(name, value);
    return parent.appendChild(made);
  };

  // Everything that is drawn in data coordinates is cut off at the axes; a group around it keeps the cut when it is stretched.
  const strips = [...document.querySelectorAll("svg.strip")].map((svg) => {
    const boxes = JSON.parse(svg.dataset.boxes);
    const stretched = [...svg.querySelectorAll("[clip-path]")].map((drawn) => {
      const cut = document.createElementNS(SVG, "g");
      cut.setAttribute("clip-path", drawn.getAttribute("clip-path"));
      drawn.removeAttribute("clip-path");
      drawn.setAttribute("vector-effect", "non-scaling-stroke");
      drawn.replaceWith(cut);
      cut.appendChild(drawn);
      return drawn;
    });
    const fixed = [...svg.querySelectorAll('[id*="x-axis"] text, [id*="region-number"]')];
    const ticks = [...svg.querySelectorAll('[id*="x-axis"] use')];
    const lines = boxes.map(([, top, , bottom]) => add(svg, "line", { class: "cursor linked", y1: top, y2: bottom, visibility: "hidden" }));
    const labels = add(svg, "g", {});
    svg.setAttribute("tabindex", "0");
    svg.setAttribute("role", "slider");
    svg.setAttribute("aria-valuemin", "0");
    svg.setAttribute("aria-valuemax", String(Math.round(whole[1])));
    return { svg, boxes, stretched, fixed, ticks, lines, labels };
  });

  const maps = [...document.querySelectorAll("svg.map")].map((svg) => ({
    map: JSON.parse(svg.dataset.map),
    view: JSON.parse(svg.dataset.view),
    marks: data.runs.map((run) => add(svg, "circle", {
      r: 4, fill: run.mark === "before" ? "#b34700" : "#0063a6", stroke: "#ffffff", "stroke-width": 1, visibility: "hidden", class: "linked",
    })),
    aim: add(svg, "circle", { r: 6, fill: "none", stroke: "#22262a", "stroke-width": 1.4, visibility: "hidden", class: "aim linked" }),
  }));

  const poses = [...document.querySelectorAll("svg.pose")].map((svg) =>
    JSON.parse(svg.dataset.views).map(({ across, up, map }, k) => ({
      across, up, map,
      arm: svg.querySelector(`[id$="-arm-${k}"] path`),
      joints: [...svg.querySelectorAll(`[id$="-arm-joints-${k}"] use`)],
    }))).flat();

  const at = ([a, b, c, d], x, y) => [a + b * x, c + d * y];

  const show = (index) => {
    place = Math.max(0, Math.min(data.s.length - 1, index));
    const s = data.s[place], points = data.arm[place];
    for (const { svg, boxes, lines } of strips) {
      lines.forEach((line, k) => {
        const [left, , right] = boxes[k];
        const x = left + (right - left) * (s - range[0]) / (range[1] - range[0]);
        line.setAttribute("x1", x);
        line.setAttribute("x2", x);
        line.setAttribute("visibility", x >= left - 0.01 && x <= right + 0.01 ? "visible" : "hidden");
      });
      svg.setAttribute("aria-valuenow", String(Math.round(s)));
      svg.setAttribute("aria-valuetext", `${s.toFixed(0)} mm along the path`);
    }
    const tip = points.slice(-3);
    for (const { map, view, marks, aim } of maps) {
      const put = (mark, point) => {
        const [x, y] = at(map, point[view.across], point[view.up]);
        mark.setAttribute("cx", x);
        mark.setAttribute("cy", y);
        mark.setAttribute("visibility", "visible");
      };
      put(aim, tip);
      data.runs.forEach((run, k) => put(marks[k], run.tip[place]));
    }
    for (const { across, up, map, arm, joints } of poses) {
      const corners = [];
      for (let k = 0; k < points.length; k += 3) corners.push(at(map, points[k + across], points[k + up]));
      arm.setAttribute("d", "M" + corners.map((c) => c.join(" ")).join("L"));
      joints.forEach((joint, k) => {
        joint.setAttribute("x", corners[k][0]);
        joint.setAttribute("y", corners[k][1]);
      });
    }
    tell(s);
  };

  const tell = (s) => {
    const rows = [["length s", `${s.toFixed(1)} mm`], ["time t", `${data.time[place].toFixed(2)} s`]];
    const inside = data.regions.filter((region) => s >= region.start && s <= region.end).map((region) => `${region.joint} in ${data.runs[region.run].name}`);
    for (const joint of data.joints) rows.push([joint.name, `${joint.target[place].toFixed(1)} ${joint.unit}`]);
    for (const run of data.runs) rows.push([`error, ${run.name}`, `${run.error[place].toFixed(2)} mm`]);
    const list = document.createElement("dl");
    for (const [name, value] of rows) {
      list.appendChild(document.createElement("dt")).textContent = name;
      list.appendChild(document.createElement("dd")).textContent = value;
    }
    const rests = list.appendChild(document.createElement("dd"));
    rests.className = "long";
    rests.textContent = inside.length ? `at rest: ${[...new Set(inside)].join(", ")}` : "at rest: none";
    readOut.replaceChildren(list);
  };

  const zoom = (start, end) => {
    range = [start, end];
    const isWhole = start === whole[0] && end === whole[1];
    const scale = (whole[1] - whole[0]) / (end - start);
    for (const { boxes, stretched, fixed, ticks, labels } of strips) {
      const [left, , right] = boxes[0];
      const shift = left - scale * (left + (right - left) * (start - whole[0]) / (whole[1] - whole[0]));
      for (const drawn of stretched) {
        if (isWhole) drawn.removeAttribute("transform");
        else drawn.setAttribute("transform", `translate(${shift} 0) scale(${scale} 1)`);
      }
      for (const drawn of [...fixed, ...ticks]) drawn.style.display = isWhole ? "" : "none";
      labels.replaceChildren();
      if (isWhole) continue;
      const bottom = boxes[boxes.length - 1][3];
      const step = niceStep((end - start) / 5);
      for (let s = Math.ceil(start / step) * step; s <= end; s += step) {
        const x = left + (right - left) * (s - start) / (end - start);
        add(labels, "line", { x1: x, x2: x, y1: bottom, y2: bottom + 3, stroke: "#22262a", "stroke-width": 0.6 });
        add(labels, "text", { x, y: bottom + 12, class: "zoom-tick" }).textContent = String(Number(s.toFixed(3)));
      }
      add(labels, "text", { x: (left + right) / 2, y: bottom + 23, class: "zoom-tick" }).textContent = "path length s [mm]";
    }
    for (const chip of document.querySelectorAll(".chip")) {
      const region = data.regions[Number(chip.dataset.region)];
      const pressed = region ? !isWhole && chip.dataset.region === chosen : isWhole;
      chip.setAttribute("aria-pressed", String(pressed));
    }
    show(place);
  };
  let chosen = "-1";

  const niceStep = (least) => {
    const power = 10 ** Math.floor(Math.log10(least));
    return power * [1, 2, 5, 10].find((factor) => factor * power >= least);
  };

  const nearest = (s) => Math.round((s - data.s[0]) / (data.s[1] - data.s[0]));

  const choose = (region) => {
    chosen = String(region);
    const found = data.regions[region];
    if (!found) return zoom(...whole);
    const margin = Math.max(0.02 * whole[1], 1.5 * (found.end - found.start));
    place = nearest((found.start + found.end) / 2);
    return zoom(Math.max(whole[0], found.start - margin), Math.min(whole[1], found.end + margin));
  };

  const fromPointer = (strip, event) => {
    const matrix = strip.svg.getScreenCTM().inverse();
    const x = matrix.a * event.clientX + matrix.e;
    const [left, , right] = strip.boxes[0];
    return range[0] + (range[1] - range[0]) * Math.max(0, Math.min(1, (x - left) / (right - left)));
  };

  for (const strip of strips) {
    strip.svg.addEventListener("pointermove", (event) => show(nearest(fromPointer(strip, event))));
    strip.svg.addEventListener("pointerdown", (event) => show(nearest(fromPointer(strip, event))));
    strip.svg.addEventListener("click", (event) => {
      const s = fromPointer(strip, event);
      const lane = event.target.closest('[id*="region-lane-"]');
      if (!lane) return;
      const run = Number(lane.id.split("-").pop());
      const apart = (region) => (region.run === run ? Math.max(region.start - s, s - region.end, 0) : Infinity);
      choose(data.regions.reduce((best, region, k) => (apart(region) < apart(data.regions[best]) ? k : best), 0));
    });
    strip.svg.addEventListener("keydown", (event) => {
      const moves = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1, PageUp: 20, PageDown: -20 };
      const step = event.shiftKey ? 10 : 1;
      if (event.key in moves) show(place + step * moves[event.key]);
      else if (event.key === "Home") show(0);
      else if (event.key === "End") show(data.s.length - 1);
      else return;
      event.preventDefault();
    });
  }
  for (const chip of document.querySelectorAll(".chip")) {
    chip.addEventListener("click", () => choose(Number(chip.dataset.region)));
  }
  addEventListener("beforeprint", () => { for (const folded of document.querySelectorAll("details")) folded.open = true; });
  document.addEventListener("keydown", (event) => { if (event.key === "Escape") choose(-1); });

  for (const element of document.querySelectorAll(".read-out, .hint, .chips")) element.hidden = false;
  const first = data.regions[0];
  place = first ? nearest(first.start) : 0;
  zoom(...whole);
})();
