"use strict";
(() => {
  const held = JSON.parse(document.getElementById("held").textContent);
  const panel = document.getElementById("try");
  const slider = panel.querySelector("input[type=range]");
  const field = panel.querySelector("input[type=number]");
  const said = (name) => panel.querySelector(`[data-said="${name}"]`);
  const all = held.documents.reduce((sum, n) => sum + n, 0);
  const positions = held.lengths.reduce((sum, n, i) => sum + n * held.documents[i], 0);
  const tokens = positions - held.overhead * all;

  // Places on the drawing: the same scale that its bars are drawn on.
  const place = (n) => {
    if (!held.doubling) return n;
    if (n < 1) return n - 1;
    const octave = Math.floor(Math.log2(n));
    return octave - 1 + n / 2 ** octave;
  };
  const [low, high] = held.edges.map(place);
  const share = (n) => (place(n) - low) / (high - low);
  const lengthAt = (part) => {
    const at = low + part * (high - low);
    if (!held.doubling) return Math.round(at);
    if (at < 0) return 1;
    const octave = Math.floor(at);
    return Math.round((at - octave + 1) * 2 ** octave);
  };

  const longer = (length) => {
    let documents = 0, beyond = 0;
    for (let i = held.lengths.length - 1; i >= 0 && held.lengths[i] > length; i--) {
      documents += held.documents[i];
      beyond += held.documents[i] * (held.lengths[i] - length);
    }
    return { documents, beyond };
  };
  const cost = (length) => {
    if (!held.model) return length;
    return length * (held.model.per_position + held.model.per_position_squared * length);
  };
  const percent = (part, whole) => {
    if (!whole) return "–";
    if (part === 0) return "0%";
    return `${((100 * part) / whole).toPrecision(3)}%`;
  };
  const counted = (n) => n.toLocaleString("en-US");

  const svg = document.querySelector("#drawn svg");
  const line = document.createElementNS("http://www.w3.org/2000/svg", "line");
  line.setAttribute("class", "tried");
  line.setAttribute("y1", "0");
  line.setAttribute("y2", svg.querySelector("line.axis").getAttribute("y1"));
  svg.append(line);

  const show = (length) => {
    const { documents, beyond } = longer(length);
    const padded = all * length;
    const kept = positions - beyond;
    said("documents").textContent = `${counted(documents)} of ${counted(all)} (${percent(documents, all)})`;
    said("tokens").textContent = `${counted(beyond)} of ${counted(tokens)} (${percent(beyond, tokens)})`;
    said("padding").textContent = `${counted(padded - kept)} of ${counted(padded)} (${percent(padded - kept, padded)})`;
    said("cost").textContent = `${(cost(length) / cost(held.recommended)).toPrecision(3)} ×`;
    Object.assign(panel.dataset, { length, documents, beyond, padding: padded - kept, cost: cost(length) });
    const x = `${2 + 96 * Math.min(1, Math.max(0, share(length)))}%`;
    line.setAttribute("x1", x);
    line.setAttribute("x2", x);
    slider.setAttribute("aria-valuetext", `${counted(length)} positions`);
  };
  const least = held.overhead + 1;
  const tried = (length, from) => {
    if (from !== field) field.value = length;
    if (from !== slider) slider.value = Math.round(1000 * Math.min(1, Math.max(0, share(length))));
    show(length);
  };
  slider.addEventListener("input", () => tried(Math.max(least, lengthAt(slider.value / 1000)), slider));
  field.addEventListener("input", () => {
    const length = Math.floor(Number(field.value));
    if (length >= least) tried(length, field);
  });
  panel.hidden = false;
  tried(held.recommended, null);
})();
