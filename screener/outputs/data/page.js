"use strict";
// Ties the pictures, the table, the filters and the card to one source.
// Values reach the page only as text (textContent), never as markup.
(async function () {
  const settings = JSON.parse(document.getElementById("page-settings").textContent);
  const pictures = JSON.parse(document.getElementById("page-pictures").textContent);
  const item = {docid: "page", roots: pictures.roots, root_ids: Object.keys(pictures.roots)};
  const byId = (id) => document.getElementById(id);
  if (!item.root_ids.length) return;
  await Bokeh.embed.embed_items({page: pictures.content}, [item]);
  const model = Bokeh.documents[0];
  const source = model.get_model_by_name("joints");
  const filter = model.get_model_by_name("shown");
  const data = source.data;
  const total = data.rank.length;
  const rankOrder = Array.from({length: total}, (_, k) => total - 1 - k); // the source holds the worst last
  let shown = rankOrder;
  let sorted = {name: "rank", down: false};
  let selected = new Set();
  let active = 0; // place of the active row among those shown

  function words(column, k) {
    const value = data[column.name][k];
    if (column.digits === null) return value;
    if (!Number.isFinite(value)) return "";
    if (column.significant && value > 0.99) return ">0.99";
    if (column.significant) return value === 0 ? "0" : value < 0.001 ? value.toExponential(column.digits - 1) : Number(value.toPrecision(column.digits)).toString();
    const digits = {minimumFractionDigits: column.digits, maximumFractionDigits: column.digits, useGrouping: column.grouped};
    return value.toLocaleString("en-US", digits);
  }

  function make(kind, text, attributes) {
    const made = document.createElement(kind);
    if (text !== undefined) made.textContent = text;
    for (const [name, value] of Object.entries(attributes || {})) made.setAttribute(name, value);
    return made;
  }

  // ---- filters
  const find = byId("find"), only = byId("only");
  const pickers = Array.from(document.querySelectorAll("select[data-column]"));
  const classButtons = Array.from(document.querySelectorAll("button[data-class]"));
  const searched = ["joint_id", "main_id", "zone"].filter((name) => name in data);
  const classLetters = "abcde";

  function passes() {
    const needle = find.value.trim().toLowerCase();
    const picks = pickers.filter((p) => p.value !== "").map((p) => [data[p.dataset.column], p.value]);
    const classes = classButtons.filter((b) => b.getAttribute("aria-pressed") === "true").map((b) => classLetters[Number(b.dataset.class)]);
    return (k) =>
      picks.every(([column, value]) => column[k] === value) &&
      (!classes.length || classes.includes(data.class[k])) &&
      (!needle || searched.some((name) => data[name][k].toLowerCase().includes(needle))) &&
      (!only.checked || selected.has(k));
  }

  function refresh() {
    shown = rankOrder.filter(passes());
    if (sorted.name !== "rank" || sorted.down) order();
    filter.indices = shown.slice().sort((a, b) => a - b);
    active = 0;
    scroller.scrollTop = 0;
    drawRows();
    say();
  }

  function order() {
    const values = data[sorted.name], sign = sorted.down ? -1 : 1;
    const text = typeof values[0] === "string";
    const collate = new Intl.Collator("en", {numeric: true}).compare;
    shown.sort((a, b) => {
      const p = values[a], q = values[b];
      if (text) return (p === "") - (q === "") || sign * collate(p, q) || data.rank[a] - data.rank[b];
      return Number.isNaN(p) - Number.isNaN(q) || sign * (p - q) || data.rank[a] - data.rank[b];
    });
  }

  function say() {
    const count = (n) => n.toLocaleString("en-US");
    byId("shown").textContent = `${count(shown.length)} of ${count(total)} joints shown, ${count(selected.size)} selected` + (selected.size === 1 ? `: ${data.joint_id[Array.from(selected)[0]]}` : "");
  }

  // ---- table: only the rows in sight exist
  const grid = byId("grid");
  const rowHeight = 30;
  const scroller = make("div", undefined, {class: "scroller", tabindex: "0", role: "grid", "aria-label": "Ranked joints", "aria-multiselectable": "true"});
  const head = make("div", undefined, {class: "row head", role: "row"});
  const space = make("div", undefined, {class: "space", role: "rowgroup"});
  scroller.append(head, space);
  grid.append(scroller);

  const widths = settings.columns.map((c) => {
    let longest = 0;
    for (let k = 0; k < total; k += Math.max(1, Math.floor(total / 300))) longest = Math.max(longest, words(c, k).length);
    return Math.min(Math.max(longest * 8.8 + 26, 84, Math.min(c.heading.length * 4, 130)), 280);
  });
  const template = widths.map((w) => `minmax(${w}px, ${w}fr)`).join(" ");
  const least = widths.reduce((a, b) => a + b, 0);
  scroller.style.setProperty("--columns", template);
  scroller.style.setProperty("--least", `${least}px`);

  settings.columns.forEach((column) => {
    const cell = make("div", undefined, {role: "columnheader", class: column.digits === null ? "" : "n"});
    const button = make("button", column.heading, {type: "button", title: column.meaning});
    button.addEventListener("click", () => {
      sorted = {name: column.name, down: sorted.name === column.name ? !sorted.down : column.digits !== null && column.name !== "rank"};
      order();
      active = 0;
      scroller.scrollTop = 0;
      headings();
      drawRows();
    });
    cell.append(button);
    head.append(cell);
  });

  function headings() {
    settings.columns.forEach((column, j) => {
      const way = column.name !== sorted.name ? "none" : sorted.down ? "descending" : "ascending";
      head.children[j].setAttribute("aria-sort", way);
    });
  }

  function drawRows() {
    space.style.height = `${shown.length * rowHeight}px`;
    scroller.setAttribute("aria-rowcount", String(shown.length + 1));
    const from = Math.max(0, Math.floor(scroller.scrollTop / rowHeight) - 6);
    const to = Math.min(shown.length, from + Math.ceil(scroller.clientHeight / rowHeight) + 12);
    const rows = [];
    for (let place = from; place < to; place++) {
      const k = shown[place];
      const row = make("div", undefined, {class: "row", role: "row", id: `row-${place}`, "aria-rowindex": String(place + 2), "aria-selected": String(selected.has(k))});
      if (place === active) row.classList.add("active");
      row.dataset.place = String(place);
      row.style.top = `${place * rowHeight}px`;
      settings.columns.forEach((column) => {
        const cell = make("div", words(column, k), {role: "gridcell", class: column.digits === null ? "" : "n"});
        if (column.name === "utilization") {
          cell.classList.add("measure");
          cell.style.setProperty("--part", String(Math.min(data.utilization[k] / 3, 1)));
        }
        if (column.digits === null) cell.title = cell.textContent;
        row.append(cell);
      });
      rows.push(row);
    }
    space.replaceChildren(...rows);
    scroller.setAttribute("aria-activedescendant", shown.length ? `row-${active}` : "");
  }

  function reveal(place) {
    active = Math.max(0, Math.min(place, shown.length - 1));
    const top = active * rowHeight, sight = scroller.clientHeight - head.offsetHeight - rowHeight;
    if (top < scroller.scrollTop) scroller.scrollTop = top;
    else if (top > scroller.scrollTop + sight) scroller.scrollTop = top - sight;
    drawRows();
  }

  function select(indices) {
    source.selected.indices = indices;
  }

  space.addEventListener("click", (event) => {
    const row = event.target.closest(".row");
    if (!row) return;
    active = Number(row.dataset.place);
    const k = shown[active];
    if (event.ctrlKey || event.metaKey || event.shiftKey) toggle(k);
    else select(selected.size === 1 && selected.has(k) ? [] : [k]);
  });

  function toggle(k) {
    const next = new Set(selected);
    if (!next.delete(k)) next.add(k);
    select(Array.from(next).sort((a, b) => a - b));
  }

  scroller.addEventListener("scroll", () => requestAnimationFrame(drawRows), {passive: true});
  scroller.addEventListener("keydown", (event) => {
    if (event.target !== scroller) return;
    const page = Math.max(1, Math.floor(scroller.clientHeight / rowHeight) - 2);
    const step = {ArrowDown: 1, ArrowUp: -1, PageDown: page, PageUp: -page, Home: -total, End: total}[event.key];
    if (step !== undefined) reveal(active + step);
    else if (event.key === " " || event.key === "Enter") shown.length && toggle(shown[active]);
    else if (event.key === "Escape") select([]);
    else return;
    event.preventDefault();
  });

  // ---- card of one joint
  const card = byId("card");
  function drawCard() {
    if (selected.size > 1) {
      const title = `${selected.size.toLocaleString("en-US")} joints selected`;
      card.replaceChildren(make("h2", title), make("p", "Tick “only selected” to see them alone."));
      return;
    }
    const k = selected.size ? Array.from(selected)[0] : rankOrder[0];
    const title = make("h2", selected.size ? "Selected joint" : "First in the ranking");
    const facts = make("dl");
    for (const column of settings.columns.concat(settings.card)) {
      const said = words(column, k);
      if (column.name === "joint_id" || said === "") continue;
      facts.append(make("dt", column.heading, {title: column.meaning}), make("dd", said));
    }
    const bars = make("table", undefined, {class: "bars limits"});
    bars.append(make("caption", "Utilization by limit state; the line is 1"));
    const known = settings.limits.filter(([name]) => Number.isFinite(data[name][k])).sort((p, q) => data[q[0]][k] - data[p[0]][k]);
    const most = Math.max(1.25, ...known.map(([name]) => data[name][k]));
    for (const [name, label] of known) {
      const value = data[name][k];
      const row = make("tr"), track = make("span", undefined, {class: "track limit"}), bar = make("span", undefined, {class: value > 1 ? "beyond" : "within"});
      bar.style.width = `${(100 * value) / most}%`;
      track.style.setProperty("--one", `${100 / most}%`);
      track.append(bar);
      const wide = make("td", undefined, {class: "wide"});
      wide.append(track);
      row.append(make("th", label, {scope: "row"}), wide, make("td", value.toFixed(2), {class: "n"}));
      bars.append(row);
    }
    card.replaceChildren(title, make("p", data.joint_id[k], {class: "name"}), bars, facts);
  }

  // ---- everything follows the selection of the source
  source.selected.properties.indices.change.connect(() => {
    selected = new Set(source.selected.indices);
    if (only.checked) refresh();
    const first = shown.findIndex((k) => selected.has(k));
    const inSight = first >= 0 && document.activeElement !== scroller && !selected.has(shown[active]);
    if (inSight) reveal(first);
    else drawRows();
    drawCard();
    say();
  });

  let waiting;
  find.addEventListener("input", () => {
    clearTimeout(waiting);
    waiting = setTimeout(refresh, 120);
  });
  pickers.forEach((picker) => picker.addEventListener("change", refresh));
  only.addEventListener("change", refresh);
  classButtons.forEach((button) =>
    button.addEventListener("click", () => {
      button.setAttribute("aria-pressed", String(button.getAttribute("aria-pressed") !== "true"));
      refresh();
    })
  );
  document.querySelectorAll("button[data-pick]").forEach((button) =>
    button.addEventListener("click", () => {
      const picker = pickers.find((p) => p.dataset.column === button.dataset.pick);
      if (!picker) return;
      picker.value = picker.value === button.dataset.value ? "" : button.dataset.value;
      refresh();
      byId("table").scrollIntoView();
    })
  );
  byId("clear").addEventListener("click", () => {
    find.value = "";
    only.checked = false;
    pickers.forEach((picker) => (picker.value = ""));
    classButtons.forEach((button) => button.setAttribute("aria-pressed", "false"));
    refresh();
  });
  byId("unselect").addEventListener("click", () => select([]));
  byId("filters").addEventListener("submit", (event) => event.preventDefault());

  const map = model.get_model_by_name("map");
  if (map) {
    document.querySelectorAll("button[data-zoom]").forEach((button) =>
      button.addEventListener("click", () => {
        if (button.dataset.zoom === "all") return Bokeh.index.get_by_id(map.id).reset();
        for (const range of [map.x_range, map.y_range]) {
          const middle = (range.start + range.end) / 2, half = ((range.end - range.start) / 2) * Number(button.dataset.zoom);
          range.setv({start: middle - half, end: middle + half});
        }
      })
    );
    document.querySelector(".zoom").hidden = false;
  }

  byId("filters").hidden = false;
  grid.hidden = false;
  document.body.classList.add("live");
  headings();
  refresh();
  drawCard();
})();
