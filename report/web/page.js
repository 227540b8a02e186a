"use strict";
// save hands a text out as a file.
const save = (name, type, text) => {
  const link = document.createElement("a");
  link.href = `data:${type};charset=utf-8,${encodeURIComponent(text)}`;
  link.download = name;
  link.click();
};

// The result stands in the page; the button hands it out.
const result = document.getElementById("result");
document.querySelectorAll(".save").forEach((p) => {
  p.hidden = !result;
  p.addEventListener("click", (event) => {
    if (event.target.closest("button")) save("result.json", "application/json", `${result.textContent}\n`);
  });
});

// columns takes a data set from the rows of the page: the values, or for bars the
// ends of two standard uncertainties each, with a gap behind every bar.
let rows;
const columns = (f) => {
  rows ||= JSON.parse(document.getElementById("rows").textContent);
  const t = [], v = [];
  for (const r of rows) {
    const y = r[f.value], u = r[f.u];
    if (r.k !== f.kind || y === undefined) continue;
    if (!f.bars) { t.push(r.t); v.push(y * f.factor); }
    else if (u > 0) { t.push(r.t, r.t, r.t); v.push((y - 2 * u) * f.factor, (y + 2 * u) * f.factor, null); }
  }
  return { t, v };
};

// begin draws a figure: each has its own charts, data and tools.
const begin = (figure) => {
  const data = JSON.parse(document.getElementById(`data${figure.dataset.figure}`).textContent);
  // A figure over the entries of an archive is drawn from the rows of the page.
  (data.fill || []).forEach((f) => { data.option.dataset[f.dataset].source = columns(f); });
  const source = JSON.stringify(data.option);
  const stage = figure.querySelector(".stage");
  const canvas = figure.querySelector(".canvas");
  const tools = figure.querySelector(".tools");
  const heads = [...stage.querySelectorAll(".head")];
  const printWidth = 680; // CSS pixels between the margins of A4 and of Letter
  let printing = false;

  // The charts grow with the text, which is larger on a very wide screen.
  const textSize = () => parseFloat(getComputedStyle(document.documentElement).fontSize);
  const fontSize = () => Math.max(10, 0.75 * textSize());
  const margin = () => ({ left: Math.max(50, 4.9 * fontSize()), right: 18 });

  const css = (name) => getComputedStyle(document.documentElement).getPropertyValue(name).trim();
  const escape = (s) => s.replace(/[&<>"']/g, (c) => `&#${c.charCodeAt(0)};`);
  const minus = (s) => s.replace("-", "−").replace("e", " × 10^").replace("^+", "^");

  // digits writes a number without the noise of binary fractions.
  const digits = (x, n) => minus(String(Number(x.toPrecision(n))));

  // power writes a mark of a logarithmic axis.
  const power = (x) => {
    const n = Math.round(Math.log10(x));
    return n > -3 && n < 5 ? digits(x, 3) : "10" + [...String(n)].map((c) => "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"["-0123456789".indexOf(c)]).join("");
  };

  // prefixed writes a number in engineering notation.
  const prefixed = (x, n) => {
    const k = Math.max(-4, Math.min(3, Math.floor(Math.log10(x) / 3 + 1e-9)));
    return `${digits(x / 1000 ** k, n)} ${["p", "n", "µ", "m", "", "k", "M", "G"][k + 4]}`;
  };

  // Some figures have a logarithmic common axis, which holds the logarithms.
  const plain = (x) => (data.logarithmic ? 10 ** x : x);
  const atText = (x) => {
    if (data.names) return `${x}: ${data.names[x - 1] || ""}`;
    if (data.dates) return `${new Date(x).toISOString().slice(0, 19).replace("T", " ")} ${data.time}`;
    return data.logarithmic ? prefixed(plain(x), 4) + data.time : `${digits(x, 9)} ${data.time}`;
  };

  // steps are the marks between two logarithms: of each decade 1, 2 and 5 or fewer,
  // or, in a short stretch, even ones.
  const steps = (lo, hi) => {
    const all = [];
    if (hi - lo < 0.7) {
      const rough = (10 ** hi - 10 ** lo) / 5, power = 10 ** Math.floor(Math.log10(rough));
      const step = power * [1, 2, 5, 10].find((m) => m * power >= rough);
      for (let k = Math.ceil(10 ** lo / step); k * step <= 10 ** hi; k++) all.push(Math.log10(k * step));
      return all;
    }
    const marks = hi - lo > 4.5 ? [1] : hi - lo > 2.5 ? [1, 3] : hi - lo > 1.3 ? [1, 2, 5] : [1, 1.5, 2, 3, 5, 7];
    for (let k = Math.floor(lo); k <= hi; k++) for (const m of marks) all.push(k + Math.log10(m));
    return all.filter((x) => x >= lo && x <= hi);
  };
  const marked = (values) => ({ axisTick: { customValues: values }, axisLabel: { customValues: values, showMinLabel: true, showMaxLabel: true } });

  // paint replaces "@name" by the colour of that name in the style sheet.
  const paint = (x) => {
    if (typeof x === "string") return x.startsWith("@") ? css(`--c-${x.slice(1)}`) : x;
    if (Array.isArray(x)) return typeof x[0] === "number" ? x : x.map(paint);
    if (x === null || typeof x !== "object") return x;
    for (const k of Object.keys(x)) if (k !== "dataset") x[k] = paint(x[k]);
    return x;
  };

  const valueOf = (p) => {
    const y = p.encode.y[0];
    return Array.isArray(p.value) ? p.value[y] : p.value[p.dimensionNames[y]];
  };

  // valuesText writes the values of one name: of a point on a bar its value with the
  // half of the bar, else up to two different ones.
  const valuesText = ({ line, scatter }) => {
    const [y] = scatter, lo = Math.min(...line), hi = Math.max(...line);
    if (line.length === 2 && scatter.length === 1 && y > lo && y < hi) return `${digits(y, 7)} ± ${digits((hi - lo) / 2, 2)}`;
    return [...new Set([...line, ...scatter].map((v) => digits(v, 5)))].slice(0, 2).join(" and ");
  };

  // tip lists what stands at the pointer, panel by panel.
  const tip = (params) => {
    if (!params.length) return "";
    let html = `<span class="t">${escape(atText(params[0].axisValue))}</span>`;
    const rows = new Map(), panels = new Map(); // panels by name
    for (const p of params) {
      const v = valueOf(p);
      if (typeof v !== "number" || Number.isNaN(v)) continue;
      const id = `${p.axisIndex} ${p.seriesName}`;
      const row = rows.get(id) || { name: p.seriesName, panel: data.panels[p.axisIndex], line: [], scatter: [] };
      row[p.seriesType].push(v);
      rows.set(id, row);
      panels.set(row.name, (panels.get(row.name) || new Set()).add(row.panel));
    }
    const apart = [...panels.values()].some((s) => s.size > 1); // one name in several charts
    let title = "";
    for (const row of rows.values()) {
      if (apart && row.panel.title !== title) html += `<span class="t">${escape((title = row.panel.title))}</span>`;
      html += `<span>${escape(row.name)}</span><b class="v">${escape(valuesText(row))} ${escape(row.panel.unit)}</b>`;
    }
    return `<div class="tip">${html}</div>`;
  };

  const axisStyle = () => ({
    axisLine: { show: true, onZero: false, lineStyle: { color: css("--line") } },
    axisTick: { show: true, lineStyle: { color: css("--line") } },
    splitLine: { show: true, lineStyle: { color: css("--grid") } },
    nameTextStyle: { color: css("--soft"), fontSize: fontSize() },
  });
  const label = (format) => ({ color: css("--soft"), fontSize: fontSize(), hideOverlap: true, formatter: format });

  // dress adds to the option what depends on the theme and what needs a function.
  const dress = () => {
    const o = paint(JSON.parse(source));
    o.backgroundColor = "transparent";
    o.textStyle = { fontFamily: getComputedStyle(document.body).fontFamily };
    for (const x of o.xAxis) Object.assign(x, axisStyle(), { nameLocation: "end", nameGap: 0, nameMoveOverlap: false, axisLabel: { ...label(data.dates ? undefined : data.logarithmic ? (v) => prefixed(plain(v), 4).trim() : (v) => digits(v, 9)), showMinLabel: false, showMaxLabel: false } });
    o.xAxis.forEach((x) => Object.assign(x.nameTextStyle, { align: "right", verticalAlign: "top", padding: [1.9 * fontSize(), 0, 0, 0] }));
    o.yAxis.forEach((y) => Object.assign(y, axisStyle(), { nameLocation: "end", nameGap: 12, axisLabel: label((v) => digits(v, 6)) }));
    o.yAxis.filter((y) => y.type === "log").forEach((y) => {
      y.axisLabel.formatter = power;
      if (y.min > 0) {
        const at = marked(steps(Math.log10(y.min), Math.log10(y.max)).map((v) => 10 ** v));
        Object.assign(y.axisTick, at.axisTick);
        Object.assign(y.axisLabel, at.axisLabel);
      }
    });
    o.yAxis.forEach((y) => Object.assign(y.nameTextStyle, { align: "right", padding: [0, 8, 0, 0] }));
    Object.assign(o.tooltip, { formatter: tip, confine: true, backgroundColor: css("--sheet"), borderColor: css("--line"), textStyle: { color: css("--ink") }, padding: [6, 10] });
    o.axisPointer.lineStyle = { color: css("--soft"), type: "solid", width: 1 };
    o.axisPointer.label = { show: false };
    for (const s of o.series) {
      if (s.markArea) s.markArea.silent = true;
      if (s.type === "line") s.emphasis = { disabled: true };
      if (s.large) s.silent = true;
      // The curve below the samples, the points read above them.
      s.z = s.type === "scatter" ? (s.large ? 3 : 4) : s.lineStyle.opacity ? 3 : 2;
    }
    Object.assign(o.dataZoom[0], { zoomOnMouseWheel: "ctrl", moveOnMouseWheel: false, preventDefaultMouseMove: false });
    Object.assign(o.dataZoom[1], {
      ...margin(), height: 26, showDetail: false, brushSelect: false,
      // The outline goes by the number of the point, which is no time in a reduced record.
      showDataShadow: data.reduced || data.bare ? false : "auto",
      borderColor: css("--line"), fillerColor: css("--c-gate"), handleStyle: { color: css("--sheet"), borderColor: css("--soft") },
      moveHandleSize: 6, moveHandleStyle: { color: css("--line") },
      dataBackground: { lineStyle: { color: css("--c-quiet"), width: 0.5 }, areaStyle: { color: css("--line"), opacity: 0.4 } },
      selectedDataBackground: { lineStyle: { color: css("--c-samples"), width: 0.7 }, areaStyle: { opacity: 0 } },
    });
    // Only for the cursor that marks a stretch; its buttons are ours.
    o.toolbox = { show: true, left: -200, top: 0, feature: { dataZoom: { yAxisIndex: "none" } } };
    return o;
  };

  const chart = echarts.init(canvas, null, { renderer: "canvas", devicePixelRatio: Math.max(2, window.devicePixelRatio || 1), height: 300 });

  // layout gives each heading its place and each panel the room below it.
  const layout = () => {
    stage.classList.add("drawn");
    stage.style.width = printing ? `${printWidth}px` : "";
    const width = stage.clientWidth;
    // On paper two figures share a sheet, but for the one of three charts; low ones go below a table.
    const printed = (data.low ? [[90], [100, 85], [110, 90, 85]] : [[180], [145, 125], [170, 130, 105]])[heads.length - 1];
    const heights = printing ? printed : width < 560 ? [210, 190, 160] : [340, 260, 210].map((h) => h * Math.max(1, textSize() / 16));
    if (heads.length === 1 && !printing) heights[0] += data.low ? -100 : 40;
    const grids = [];
    let y = 0;
    heads.forEach((head, i) => {
      head.style.top = `${y}px`;
      y += head.offsetHeight + 1.4 * fontSize() + 9;
      grids.push({ ...margin(), top: y, height: heights[i], containLabel: false, outerBoundsMode: "none" });
      y += heights[i] + 2 * fontSize() + (printing ? 12 : 22);
    });
    const slider = { show: !printing, top: y };
    if (!printing) y += 40;
    canvas.style.height = `${y}px`;
    chart.resize({ width, height: y });
    return { grid: grids, dataZoom: [{}, slider] };
  };

  // draw keeps the stretch of time and the series that are switched off.
  const draw = () => {
    const old = chart.getOption();
    const option = dress();
    const place = layout();
    option.grid = place.grid;
    Object.assign(option.dataZoom[1], place.dataZoom[1]);
    if (old && old.dataZoom) {
      option.legend.selected = old.legend[0].selected;
      for (const z of option.dataZoom) Object.assign(z, { start: old.dataZoom[0].start, end: old.dataZoom[0].end });
    }
    chart.setOption(option, { notMerge: true });
    remark();
  };

  // remark puts the marks of a logarithmic common axis where it is looked at.
  const remark = () => {
    if (!data.logarithmic) return;
    const { min, max } = data.option.xAxis[0], { start, end } = stretch();
    const at = (percent) => min + ((max - min) * percent) / 100;
    chart.setOption({ xAxis: data.option.xAxis.map(() => marked(steps(at(start), at(end)))) });
  };

  const zoomTo = (start, end) => chart.dispatchAction({ type: "dataZoom", start: Math.max(0, start), end: Math.min(100, end) });
  const stretch = () => chart.getOption().dataZoom[0];
  const move = (scale, shift) => {
    const { start, end } = stretch();
    const half = Math.min(50, ((end - start) / 2) * scale);
    const middle = Math.min(100 - half, Math.max(half, (start + end) / 2 + shift * (end - start)));
    zoomTo(middle - half, middle + half);
  };

  const select = (on) => {
    tools.querySelector("[data-do=select]").setAttribute("aria-pressed", String(on));
    chart.dispatchAction({ type: "takeGlobalCursor", key: "dataZoomSelect", dataZoomSelectActive: on });
  };

  // title writes heading and legend of a panel into the picture, where the page has them as text.
  const marks = { line: "━━", dash: "╍╍", dots: "•••", ring: "○", cross: "◆", band: "██" };
  const title = (head, i, top) => {
    const rich = { title: { fontSize: 15, fontWeight: "bold", lineHeight: 22, color: css("--ink") } };
    const lines = [[]];
    let room = 0;
    [...head.querySelectorAll(".key")].filter((k) => k.getAttribute("aria-pressed") !== "false").forEach((k, n) => {
      const [, kind, color] = k.querySelector(".mark").classList;
      rich[`k${n}`] = { color: css(`--${color}`), fontSize: 13, fontWeight: "bold" };
      room += 8 * (k.textContent.length + 8);
      if (room > stage.clientWidth && lines.at(-1).length) {
        lines.push([]);
        room = 8 * (k.textContent.length + 8);
      }
      lines.at(-1).push(`{k${n}|${marks[kind]}} ${k.textContent}`);
    });
    const name = i === 0 ? `${data.name} – ${data.panels[i].title}` : data.panels[i].title;
    return {
      text: [`{title|${name.replace(/[{}|\n]/g, " ")}}`, ...lines.map((line) => line.join("     "))].join("\n"),
      left: 8, top: top - 1.4 * fontSize() - 34 - 18 * lines.length, padding: 0,
      textStyle: { rich, color: css("--ink"), fontSize: 13, fontWeight: "normal", lineHeight: 18 },
    };
  };

  // picture saves the charts.
  const picture = () => {
    const titles = heads.map((head, i) => title(head, i, chart.getOption().grid[i].top));
    chart.setOption({ title: titles, dataZoom: [{}, { show: false }] });
    const link = document.createElement("a");
    link.href = chart.getDataURL({ type: "png", pixelRatio: 2, backgroundColor: css("--paper") });
    link.download = data.picture || "free-decay.png";
    link.click();
    chart.setOption({ title: titles.map(() => ({ show: false })), dataZoom: [{}, { show: true }] });
  };

  // table saves all that is drawn, a line for each point.
  const quoted = (s) => (/[",\n]/.test(s) ? `"${s.replaceAll('"', '""')}"` : s);
  const table = () => {
    const lines = [["chart", "curve", `x (${data.time})`, "value", "unit"].map(quoted).join(",")];
    const seen = new Set();
    for (const s of data.option.series) {
      const { x, y } = s.encode, at = s.datasetIndex || 0, panel = data.panels[s.yAxisIndex || 0];
      const key = [panel.title, s.name, at, y].join("\n");
      if (seen.has(key)) continue; // drawn twice, as line and as dots
      seen.add(key);
      const { source } = data.option.dataset[at];
      source[x].forEach((t, i) => {
        if (source[y][i] !== null) lines.push([quoted(panel.title), quoted(s.name), data.logarithmic ? Number(plain(t).toPrecision(6)) : t, source[y][i], quoted(panel.unit)].join(","));
      });
    }
    return `${lines.join("\r\n")}\r\n`;
  };

  const actions = {
    all: () => zoomTo(0, 100), in: () => move(0.5, 0), out: () => move(2, 0), left: () => move(1, -0.5), right: () => move(1, 0.5),
    select: (b) => select(b.getAttribute("aria-pressed") !== "true"), picture,
    table: () => save((data.picture || "free-decay.png").replace(/\.png$/, ".csv"), "text/csv", table()),
  };
  const showView = (v, room) => {
    const { min, max } = data.option.xAxis[0];
    const at = (t) => (100 * (t - min)) / (max - min);
    const extra = room * (at(v.to) - at(v.from));
    zoomTo(at(v.from) - extra, at(v.to) + extra);
  };

  tools.addEventListener("click", (event) => {
    const b = event.target.closest("button");
    if (!b) return;
    if (b.dataset.view) showView(data.views[Number(b.dataset.view)], 0);
    else actions[b.dataset.do](b);
  });
  stage.addEventListener("click", (event) => {
    const b = event.target.closest("button[data-series]");
    if (!b) return;
    const on = b.getAttribute("aria-pressed") !== "true";
    b.setAttribute("aria-pressed", String(on));
    chart.dispatchAction({ type: on ? "legendSelect" : "legendUnSelect", name: b.dataset.series });
  });
  chart.on("datazoom", (event) => {
    remark();
    if (event.batch && tools.querySelector("[data-do=select]").getAttribute("aria-pressed") === "true") select(false);
  });

  tools.hidden = false;
  draw();
  // A gate that is a small part of a long record deserves the first look.
  if (data.views.length && !data.whole) {
    const { min, max } = data.option.xAxis[0];
    const gate = data.views[0];
    if (gate.to - gate.from < 0.4 * (max - min)) showView(gate, 0.12);
  }

  let pending = 0;
  new ResizeObserver(() => {
    if (printing || pending) return;
    pending = requestAnimationFrame(() => { pending = 0; if (!printing) chart.setOption(layout()); });
  }).observe(stage);
  matchMedia("(prefers-color-scheme: dark)").addEventListener("change", () => { if (!printing) draw(); });
  const print = (on) => {
    if (printing === on) return;
    printing = on;
    // The event comes before the rules for print hold; the class brings what the charts depend on.
    document.documentElement.classList.toggle("printing", on);
    draw();
  };
  addEventListener("beforeprint", () => print(true));
  addEventListener("afterprint", () => print(false));
  matchMedia("print").addEventListener("change", (event) => print(event.matches));
};

// The first figure is drawn at once, the others when it can be seen, or before they are printed.
const waiting = [...document.querySelectorAll("figure.charts")];
const next = () => {
  if (waiting.length) begin(waiting.shift());
  if (waiting.length) setTimeout(next);
};
addEventListener("beforeprint", () => waiting.splice(0).forEach(begin));
next();
