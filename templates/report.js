// Filters and sorts the appendix on screen. It remembers nothing; without it every row is there all the same.
"use strict";
{
  const appendix = document.querySelector(".appendix");
  const bodies = [...appendix.querySelectorAll("table.tests tbody")];
  const rows = bodies.flatMap((body) => [...body.rows]);
  const most = bodies.length ? bodies[0].rows.length : 0;
  const superscripts = "⁰¹²³⁴⁵⁶⁷⁸⁹";

  // Reads a number as the report writes it: −12 345.6, 4.2 × 10⁻⁵, 95 %; NaN for text.
  const number = (text) => {
    const plain = text
      .replace(/[\s\u00a0\u202f%<>]/g, "")
      .replace("×10", "e")
      .replace(/[⁻⁰¹²³⁴⁵⁶⁷⁸⁹]/g, (sign) => (sign === "⁻" ? "-" : superscripts.indexOf(sign)))
      .replace(/−/g, "-")
      .replace("∞", "Infinity");
    return parseFloat(/^10-?\d+$/.test(plain) ? plain.replace("10", "1e") : plain);
  };

  const compare = (column, sign) => (one, other) => {
    const texts = [one, other].map((row) => row.cells[column].textContent.trim());
    const values = texts.map(number);
    if (values.every(Number.isNaN)) return sign * texts[0].localeCompare(texts[1], "en");
    if (values.some(Number.isNaN)) return Number.isNaN(values[0]) ? 1 : -1;
    return sign * (values[0] - values[1] || 0);
  };

  const place = (ordered) => ordered.forEach((row, at) => bodies[Math.floor(at / most)].append(row));

  const sortBy = (column) => {
    const heads = [...appendix.querySelectorAll("table.tests thead tr")].map((head) => head.cells);
    const ascending = heads[0][column].getAttribute("aria-sort") !== "ascending";
    heads.forEach((cells) => [...cells].forEach((cell) => cell.removeAttribute("aria-sort")));
    heads.forEach((cells) => cells[column].setAttribute("aria-sort", ascending ? "ascending" : "descending"));
    place([...rows].sort(compare(column, ascending ? 1 : -1)));
  };

  const addSorting = (cell) => {
    const button = document.createElement("button");
    button.type = "button";
    button.className = "sort";
    button.append(...cell.childNodes);
    button.addEventListener("click", () => sortBy(cell.cellIndex));
    cell.append(button);
  };

  const addFilter = () => {
    const tool = document.createElement("div");
    const label = document.createElement("label");
    const input = document.createElement("input");
    const count = document.createElement("output");
    tool.className = "tool";
    label.textContent = "Show the rows that hold";
    label.htmlFor = input.id = "filter";
    input.type = "search";
    input.autocomplete = "off";
    input.addEventListener("input", () => {
      const wanted = input.value.trim().toLowerCase();
      rows.forEach((row) => { row.hidden = !row.textContent.toLowerCase().includes(wanted); });
      bodies.forEach((body) => { body.closest(".chunk").hidden = [...body.rows].every((row) => row.hidden); });
      count.textContent = wanted ? `${rows.filter((row) => !row.hidden).length} of ${rows.length} rows` : "";
    });
    tool.append(label, input, count);
    appendix.querySelector(".chunk").before(tool);
  };

  if (rows.length > 1) {
    appendix.querySelectorAll("table.tests thead th").forEach(addSorting);
    addFilter();
  }
}
