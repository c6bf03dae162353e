"use strict";
(function () {
  // Tables are sorted by their headings, numbers as numbers, and what is no number last.
  function keyOf(row, at, isNumber) {
    var text = row.cells[at].textContent.trim();
    if (!isNumber) return text.toLowerCase();
    var x = parseFloat(text);
    return isNaN(x) ? null : text.indexOf("%") > 0 ? x / 100 : x;
  }
  function compare(a, b) {
    if (a === null || b === null) return (a === null) - (b === null);
    return typeof a === "number" ? a - b : a.localeCompare(b, "en", { numeric: true });
  }
  function sort(table, at, isNumber, isDescending) {
    var body = table.tBodies[0];
    var rows = Array.from(body.rows).map(function (row) { return { row: row, key: keyOf(row, at, isNumber) }; });
    rows.sort(function (a, b) {
      if (a.key === null || b.key === null) return compare(a.key, b.key);
      return isDescending ? compare(b.key, a.key) : compare(a.key, b.key);
    });
    rows.forEach(function (r) { body.appendChild(r.row); });
  }
  document.querySelectorAll("table").forEach(function (table) {
    var heads = Array.from(table.tHead.rows[0].cells);
    heads.forEach(function (head, at) {
      var isNumber = head.classList.contains("number");
      var button = document.createElement("button");
      button.type = "button";
      while (head.firstChild) button.appendChild(head.firstChild);
      head.appendChild(button);
      button.addEventListener("click", function () {
        var was = head.getAttribute("aria-sort");
        var isDescending = was === null ? isNumber : was === "ascending";
        heads.forEach(function (other) { other.removeAttribute("aria-sort"); });
        head.setAttribute("aria-sort", isDescending ? "descending" : "ascending");
        sort(table, at, isNumber, isDescending);
      });
    });
  });

  // Rows are searched for all of the words that are typed.
  document.querySelectorAll("table[data-filter]").forEach(function (table) {
    var rows = Array.from(table.tBodies[0].rows);
    var box = document.createElement("p");
    box.className = "filter";
    var label = document.createElement("label");
    label.textContent = "Rows with";
    var input = document.createElement("input");
    input.type = "search";
    input.setAttribute("aria-label", "Rows with words, " + table.closest(".wide").getAttribute("aria-label"));
    label.appendChild(input);
    var count = document.createElement("span");
    count.setAttribute("role", "status");
    box.append(label, count);
    var wide = table.closest(".wide");
    wide.parentNode.insertBefore(box, wide);
    function show() {
      var words = input.value.toLowerCase().split(/\s+/).filter(Boolean);
      var shown = 0;
      rows.forEach(function (row) {
        var text = row.textContent.toLowerCase();
        row.hidden = !words.every(function (word) { return text.indexOf(word) >= 0; });
        if (!row.hidden) shown++;
      });
      count.textContent = shown + " of " + rows.length;
    }
    input.addEventListener("input", show);
    show();
  });

  // Figures say their values where the pointer is, or where the arrow keys have gone.
  document.querySelectorAll("figure.has-values").forEach(function (figure) {
    var overlay = figure.querySelector(".strips");
    var strips = Array.from(overlay.querySelectorAll("rect"));
    var words = strips.map(function (strip) { return strip.querySelector("title").textContent; });
    strips.forEach(function (strip) { strip.querySelector("title").remove(); });
    var line = document.createElementNS("http://www.w3.org/2000/svg", "line");
    overlay.appendChild(line);
    var values = document.createElement("p");
    values.className = "values";
    values.setAttribute("aria-live", "polite");
    figure.insertBefore(values, figure.querySelector("figcaption"));
    figure.tabIndex = 0;
    figure.setAttribute("role", "group");
    figure.setAttribute("aria-label", figure.querySelector("figcaption").textContent + " Arrow keys read the values.");
    var at = -1;
    function show(next) {
      at = Math.max(0, Math.min(strips.length - 1, next));
      var strip = strips[at];
      var top = parseFloat(strip.getAttribute("y"));
      line.setAttribute("x1", strip.dataset.at);
      line.setAttribute("x2", strip.dataset.at);
      line.setAttribute("y1", top);
      line.setAttribute("y2", top + parseFloat(strip.getAttribute("height")));
      values.textContent = words[at];
    }
    // A pointer that rests while keys scroll the page says nothing.
    strips.forEach(function (strip, i) { strip.addEventListener("pointermove", function () { if (i !== at) show(i); }); });
    figure.addEventListener("keydown", function (event) {
      var step = { ArrowLeft: -1, ArrowRight: 1, PageUp: -10, PageDown: 10 }[event.key];
      if (event.key === "Home") show(0);
      else if (event.key === "End") show(strips.length - 1);
      else if (step) show(at + step);
      else return;
      event.preventDefault();
    });
  });

  // What a link leads to is opened, and what is printed: all but long tables, which are
  // printed where the reader has opened them.
  function open() {
    var target = location.hash && document.getElementById(decodeURIComponent(location.hash.slice(1)));
    for (var node = target; node; node = node.parentElement) if (node.tagName === "DETAILS") node.open = true;
    if (target) target.scrollIntoView();
  }
  window.addEventListener("hashchange", open);
  open();
  window.addEventListener("beforeprint", function () {
    document.querySelectorAll("details.part").forEach(function (d) { d.open = true; });
  });
})();
