"use strict";
(() => {
  const at = (id) => document.getElementById(id);
  const data = JSON.parse(at("go-data").textContent);
  const cards = [...document.querySelectorAll("article.card")];
  const fold = (text) => text.trim().toLowerCase();

  // What if: the slider steps through the solved points, so that every number shown was solved.
  for (const card of cards) {
    const slider = card.querySelector(".what-if input");
    if (!slider) continue;
    const curve = data.curves[card.dataset.position];
    const said = card.querySelector(".what-if output");
    const rows = [...card.querySelectorAll(".what-if tbody tr")];
    const marker = card.querySelector("svg line.now");
    const show = () => {
      const i = Number(slider.value);
      said.textContent = `${curve.ohm[i]}, ${curve.leak[i]} through it`;
      slider.setAttribute("aria-valuetext", said.textContent);
      curve.rows.forEach((row, n) => {
        rows[n].querySelector(".now").textContent = row.values[i];
        rows[n].querySelector(".verdict").textContent = data.verdicts[row.verdicts[i]];
        rows[n].classList.toggle("is-past", row.verdicts[i] === 0);
      });
      if (marker) {
        marker.setAttribute("x1", curve.x[i]);
        marker.setAttribute("x2", curve.x[i]);
      }
    };
    slider.addEventListener("input", show);
    show(); // a reload may keep the slider where it was
  }

  // The map: what the faults of a selected position run through stands out.
  const map = document.querySelector("svg.map");
  const chips = map ? [...map.querySelectorAll(".chip")] : [];
  const select = (chip) => {
    const again = chip.getAttribute("aria-pressed") === "true";
    for (const each of chips) each.setAttribute("aria-pressed", String(each === chip && !again));
    map.classList.toggle("selected", !again);
    const name = chip.dataset.position;
    for (const each of map.querySelectorAll("[data-chain]")) {
      each.classList.toggle("lit", !again && each.dataset.chain.split(" ").includes(name));
    }
    const said = at("go-said");
    said.textContent = again ? "Nothing is selected." : `${data.said[name]} `;
    if (again) return;
    const link = document.createElement("a");
    link.href = `#${encodeURIComponent(name)}`;
    link.textContent = `Open the card of ${name}`;
    said.append(link);
  };
  for (const chip of chips) {
    chip.addEventListener("click", () => select(chip));
    chip.addEventListener("keydown", (event) => {
      if (event.key !== "Enter" && event.key !== " ") return;
      event.preventDefault();
      select(chip);
    });
  }

  // Sorting: numbers by their unrounded value, words after numbers.
  const order = (a, b) => {
    const [x, y] = [a, b].map((cell) => cell.dataset.value);
    if (x !== undefined && y !== undefined) return Number(x) - Number(y);
    if (x !== undefined || y !== undefined) return x === undefined ? 1 : -1;
    return a.textContent.localeCompare(b.textContent, "en", { numeric: true });
  };
  for (const table of document.querySelectorAll("table.sortable")) {
    const heads = [...table.tHead.rows[0].cells];
    heads.forEach((head, column) => {
      head.firstElementChild.addEventListener("click", () => {
        const down = head.getAttribute("aria-sort") === "ascending";
        for (const each of heads) each.removeAttribute("aria-sort");
        head.setAttribute("aria-sort", down ? "descending" : "ascending");
        const rows = [...table.tBodies[0].rows];
        rows.sort((a, b) => (down ? -1 : 1) * order(a.cells[column], b.cells[column]));
        table.tBodies[0].append(...rows);
      });
    });
  }

  // Filter of the positions.
  const positions = document.querySelector("table.positions");
  const severity = at("go-severity");
  const words = at("go-words");
  const filter = () => {
    const rows = [...positions.tBodies[0].rows];
    const wanted = fold(words.value).split(/\s+/);
    for (const row of rows) {
      const text = fold(row.textContent);
      const done = row.cells[row.cells.length - 1].textContent.trim();
      const fits = !severity.value || done === severity.value;
      row.hidden = !(fits && wanted.every((word) => text.includes(word)));
    }
    const left = rows.filter((row) => !row.hidden).length;
    at("go-count").textContent = `${left} of ${rows.length} positions`;
  };
  severity.addEventListener("change", filter);
  words.addEventListener("input", filter);
  filter();

  // Find by typing, and deep links whatever the case of the letters.
  const named = (name) =>
    cards.find((card) => fold(card.dataset.position) === fold(name)) ||
    cards.find((card) => fold(card.dataset.position).startsWith(fold(name)));
  const go = (card) => {
    card.scrollIntoView();
    card.focus({ preventScroll: true });
  };
  const find = at("go-find");
  const say = () => {
    const card = find.value.trim() && named(find.value);
    const none = find.value.trim() ? "no such part" : "";
    at("go-found").textContent = card ? card.querySelector("h3").textContent.trim().replace(/\s+/g, " ") : none;
  };
  find.addEventListener("input", say);
  find.form.addEventListener("submit", (event) => {
    event.preventDefault();
    const card = find.value.trim() && named(find.value);
    if (!card) return;
    location.hash = encodeURIComponent(card.dataset.position);
    go(card);
  });
  const follow = () => {
    let name = location.hash.slice(1);
    try {
      name = decodeURIComponent(name);
    } catch {
      return; // a broken link leads nowhere
    }
    if (!name || at(name)?.tagName === "H2") return;
    const card = named(name);
    if (card) go(card);
  };
  addEventListener("hashchange", follow);
  follow();
  addEventListener("keydown", (event) => {
    const typing = /^(INPUT|SELECT|TEXTAREA)$/.test(event.target.tagName);
    if (event.key !== "/" || typing || event.ctrlKey || event.metaKey || event.altKey) return;
    event.preventDefault();
    find.focus();
  });
  at("go-print").addEventListener("click", () => print());
})();
