"use strict";
(() => {
  const counted = (n) => n.toLocaleString("en-US");
  const percent = (part, all) => {
    if (!all) return "–";
    if (part === 0) return "0%";
    return `${((100 * part) / all).toPrecision(3)}%`;
  };
  const made = (name, fields) => Object.assign(document.createElement(name), fields);

  // Tables: a button in each head sorts, a field above a long one finds.
  const cellText = (row, place) => {
    const cell = row.cells[place];
    const first = [...cell.childNodes].find((node) => node.textContent.trim());
    return first ? first.textContent.trim() : "";
  };
  const numeric = (text) => {
    const found = /^[<>]?\s*(-?[\d,]*\.?\d+)/.exec(text);
    return found ? Number(found[1].replaceAll(",", "")) : null;
  };
  const compare = (a, b) => {
    const [m, n] = [numeric(a), numeric(b)];
    if (m !== null && n !== null) return m - n;
    if (m !== null || n !== null) return m !== null ? -1 : 1;
    return a.localeCompare(b);
  };
  const sortBy = (table, head, place) => {
    const body = table.tBodies[0];
    const up = head.getAttribute("aria-sort") === "descending";
    for (const other of table.tHead.querySelectorAll("[aria-sort]")) other.removeAttribute("aria-sort");
    head.setAttribute("aria-sort", up ? "ascending" : "descending");
    const rows = [...body.rows].map((row, order) => ({ row, order, text: cellText(row, place) }));
    const absent = (text) => text === "" || text === "–";
    rows.sort((a, b) => {
      if (absent(a.text) !== absent(b.text)) return absent(a.text) ? 1 : -1;
      return (up ? 1 : -1) * compare(a.text, b.text) || a.order - b.order;
    });
    body.append(...rows.map(({ row }) => row));
  };
  for (const table of document.querySelectorAll("table.sorts")) {
    const heads = [...table.tHead.rows[table.tHead.rows.length - 1].cells];
    const spans = table.querySelector("tbody [rowspan], tbody [colspan]");
    if (spans || table.tBodies[0].rows.length < 2) continue;
    heads.forEach((head, place) => {
      const name = head.textContent.trim();
      const button = made("button", { type: "button", className: "sort", textContent: "↕" });
      button.setAttribute("aria-label", `Sort by ${name}`);
      button.addEventListener("click", () => sortBy(table, head, place));
      head.append(button);
    });
    if (table.tBodies[0].rows.length < 12) continue;
    const field = made("input", { type: "search" });
    const told = made("span", { textContent: "" });
    told.setAttribute("aria-live", "polite");
    const label = made("label", { className: "find" });
    label.append("Rows that hold ", field, " ", told);
    field.addEventListener("input", () => {
      const sought = field.value.trim().toLowerCase();
      let shown = 0;
      for (const row of table.tBodies[0].rows) {
        row.hidden = !row.textContent.toLowerCase().includes(sought);
        shown += row.hidden ? 0 : 1;
      }
      told.textContent = sought ? `${counted(shown)} of ${counted(table.tBodies[0].rows.length)}` : "";
    });
    table.closest(".wide").before(label);
  }

  // A maximum length tried out: what it would cut under each vocabulary.
  const panel = document.getElementById("try");
  const held = panel ? JSON.parse(document.getElementById("held").textContent) : [];
  if (!held.length) return;
  const slider = panel.querySelector("input[type=range]");
  const field = panel.querySelector("input[type=number]");
  const longest = Math.max(...held.map((own) => own.lengths[own.lengths.length - 1]));
  const lengthAt = (part) => Math.max(1, Math.round(longest ** (part / 1000)));
  const partAt = (length) => longest > 1 ? Math.round((1000 * Math.log(length)) / Math.log(longest)) : 1000;
  const cutAt = (own, length) => {
    let documents = 0, tokens = 0;
    for (let i = own.lengths.length - 1; i >= 0 && own.lengths[i] > length; i--) {
      documents += own.documents[i];
      tokens += own.documents[i] * (own.lengths[i] - length);
    }
    return { documents, tokens };
  };
  const show = (length) => {
    panel.querySelector("ul").replaceChildren(...held.map((own) => {
      const { documents, tokens } = cutAt(own, length);
      const all = own.documents.reduce((sum, n) => sum + n, 0);
      const line = made("li", {
        textContent: `${own.name}: ${counted(documents)} of ${counted(all)} documents (${percent(documents, all)}) are longer, `
          + `${counted(tokens)} tokens (${percent(tokens, own.tokens)}) would be cut.`,
      });
      Object.assign(line.dataset, { documents, tokens });
      return line;
    }));
    slider.setAttribute("aria-valuetext", `${counted(length)} positions`);
  };
  const tried = (length, from) => {
    if (from !== field) field.value = length;
    if (from !== slider) slider.value = Math.min(1000, partAt(length));
    show(length);
  };
  slider.addEventListener("input", () => tried(lengthAt(Number(slider.value)), slider));
  field.addEventListener("input", () => {
    const length = Math.floor(Number(field.value));
    if (length >= 1) tried(length, field);
  });
  panel.hidden = false;
  tried(held[0].limit ?? longest, null);
})();
