"use strict";
for (const table of document.querySelectorAll("table.long")) {
  const bodies = [...table.tBodies];
  const heads = [...table.tHead.rows[0].cells];
  const key = (body, place) => {
    const cell = body.rows[0].cells[place];
    return cell.dataset.value === undefined ? cell.textContent.trim() : Number(cell.dataset.value);
  };
  const empty = (value) => value === "" || value === "-";
  const order = (one, other, sign) => {
    if (empty(one) || empty(other)) return empty(one) - empty(other); // last, either way
    if (typeof one === "number" && typeof other === "number") return sign * (one - other);
    return sign * String(one).localeCompare(String(other), "en", { numeric: true });
  };
  heads.forEach((head, place) => {
    if (head.tagName !== "TH") return;
    const button = document.createElement("button");
    button.type = "button";
    button.append(head.firstChild);
    head.prepend(button);
    button.addEventListener("click", () => {
      const was = head.getAttribute("aria-sort");
      heads.forEach((other) => other.removeAttribute("aria-sort"));
      const now = { ascending: "descending", descending: "" }[was] ?? "ascending";
      if (now) head.setAttribute("aria-sort", now);
      const sign = now === "descending" ? -1 : 1;
      const sorted = now ? [...bodies].sort((a, b) => order(key(a, place), key(b, place), sign)) : bodies;
      table.append(...sorted);
    });
  });
  const filter = document.createElement("p");
  filter.className = "filter";
  const label = document.createElement("label");
  const input = document.createElement("input");
  input.type = "search";
  input.setAttribute("aria-label", `Show rows with, ${table.caption.textContent}`);
  label.append("Show rows with", input);
  filter.append(label);
  table.parentElement.before(filter);
  input.addEventListener("input", () => {
    const wanted = input.value.trim().toLowerCase();
    for (const body of bodies) body.hidden = !body.textContent.toLowerCase().includes(wanted);
  });
}
