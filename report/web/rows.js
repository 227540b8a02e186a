"use strict";
// The table of an index page: all rows, sorted by any column and filtered.
{
  const table = document.querySelector("table.rows");
  const body = table.tBodies[0];
  const heads = [...table.tHead.rows[0].cells];
  const form = document.querySelector("form.filter");
  const more = document.querySelector(".more button");
  const rows = JSON.parse(document.getElementById("rows").textContent);
  const page = 200; // rows in the document until more are asked for
  const order = new Intl.Collator(undefined, { numeric: true, sensitivity: "base" });
  let shown = page;
  let found = rows;

  const element = (tag, text, className) => {
    const e = document.createElement(tag);
    if (text !== undefined) e.textContent = text;
    if (className) e.className = className;
    return e;
  };
  const when = (ms) => new Date(ms).toISOString().slice(0, 19).replace("T", " ");
  const names = heads.map((h) => h.textContent);
  const link = (href, text) => {
    const a = element("a");
    a.href = href;
    a.append(element("bdi", text));
    return a;
  };
  const spark = (course) => {
    const svg = document.createElementNS("http://www.w3.org/2000/svg", "svg");
    svg.setAttribute("class", "spark");
    svg.setAttribute("viewBox", "0 0 80 18");
    svg.setAttribute("aria-hidden", "true");
    const path = document.createElementNS(svg.namespaceURI, "path");
    path.setAttribute("d", course);
    svg.append(path);
    return svg;
  };

  // A row's text under a key; kinds of measurement go by their names.
  const kindNames = { ringdown: "ring-down", crosscheck: "cross-check" };
  const said = (r, key) => (key === "k" && kindNames[r.k]) || (r[key] ?? "");

  // Each kind of column fills its cell from a row.
  const kinds = {
    entry: (cell, r) => cell.append(link(`${encodeURIComponent(r.n)}/report.html`, when(r.t))),
    device: (cell, r) => cell.append(link(`${encodeURIComponent(r.p)}/index.html`, r.d)),
    time: (cell, r) => cell.append(when(r.t)),
    text: (cell, r, key) => cell.append(element("bdi", said(r, key))),
    number: (cell, r, key) => cell.append(String(r[key] ?? "")),
    word: (cell, r, key) => r[key] && cell.append(element("strong", r[key], /^[a-z]+$/.test(r[key]) ? r[key] : "")),
    trend: (cell, r) => cell.append(...(r.g ? [spark(r.g)] : []), r.dr || ""),
  };
  const line = (r) => {
    const tr = element("tr");
    for (const head of heads) {
      const { as, text, sort } = head.dataset;
      const first = head === heads[0];
      const cell = element(first ? "th" : "td", undefined, head.className);
      if (first) cell.scope = "row";
      kinds[as](cell, r, text || sort);
      if (!first && cell.hasChildNodes()) cell.dataset.label = names[heads.indexOf(head)];
      tr.append(cell);
    }
    return tr;
  };

  const draw = () => {
    body.replaceChildren(...found.slice(0, shown).map(line));
    const all = rows.length.toLocaleString("en").replaceAll(",", " ");
    form.elements.count.value = found.length === rows.length ? `all ${all}` : `${found.length} of ${all}`;
    more.hidden = found.length <= shown;
    more.textContent = `Show all ${found.length}`;
  };

  // What a row is searched by.
  const keys = ["d", "n", "k", "s", "v", "c", "ft", "qt", "at", "dr"];
  const text = (r) => (r.text ||= keys.map((k) => said(r, k)).join(" ").toLowerCase() + " " + when(r.t));
  const compare = (key, sign) => (a, b) => {
    const x = a[key], y = b[key];
    if (x === undefined || y === undefined || x === "" || y === "") return (x === undefined || x === "") - (y === undefined || y === "");
    return sign * (typeof x === "number" ? x - y : order.compare(x, y));
  };
  const choose = () => {
    const words = form.elements.words.value.toLowerCase().split(/\s+/).filter(Boolean);
    const status = form.elements.status.value;
    found = rows.filter((r) => (!status || r.s === status || r.v === status) && words.every((w) => text(r).includes(w)));
    const head = heads.find((h) => h.hasAttribute("aria-sort"));
    found.sort(compare(head.dataset.sort, head.getAttribute("aria-sort") === "ascending" ? 1 : -1));
    draw();
  };

  for (const head of heads) {
    const button = element("button");
    button.type = "button";
    button.append(...head.childNodes);
    head.append(button);
    button.addEventListener("click", () => {
      const up = head.getAttribute("aria-sort") !== "ascending";
      heads.forEach((h) => h.removeAttribute("aria-sort"));
      head.setAttribute("aria-sort", up ? "ascending" : "descending");
      choose();
    });
  }
  form.addEventListener("input", () => { shown = page; choose(); });
  form.addEventListener("submit", (event) => event.preventDefault());
  more.addEventListener("click", () => { shown = Infinity; draw(); });
  addEventListener("beforeprint", () => { if (found.length <= 1000) { shown = Infinity; draw(); } });
  form.hidden = false;
  choose();
}
