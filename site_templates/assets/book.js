// Small things that a page cannot say without a script; it reads well without them.
(function () {
  "use strict";
  // Search needs http: from disk a browser refuses the worker that it runs in.
  if (location.protocol === "file:") document.documentElement.setAttribute("data-bb-disk", "");

  // The catalogue: narrowed and ordered by what stands in the address, which can be sent to someone.
  function catalogue(form) {
    var body = document.querySelector(".bb-catalogue tbody");
    if (!body) return;
    var rows = Array.prototype.slice.call(body.rows);
    var names = Array.prototype.map.call(form.querySelectorAll("[name]"), function (one) { return one.name; })
      .filter(function (name) { return name !== "shown"; });

    function read() {
      var view = new URLSearchParams(location.hash.slice(1));
      names.forEach(function (name) { form.elements[name].value = view.get(name) || ""; });
    }
    function fits(row) {
      var words = form.elements.find.value.toLowerCase().split(/\s+/).filter(Boolean);
      var text = row.textContent.toLowerCase();
      return words.every(function (word) { return text.indexOf(word) >= 0; }) && names.every(function (name) {
        var wanted = name === "find" || name === "order" ? "" : form.elements[name].value;
        return !wanted || (row.getAttribute("data-" + name) || "").split("|").indexOf(wanted) >= 0;
      });
    }
    function ordered() {
      var by = form.elements.order.value;
      if (!by) return rows;
      return rows.slice().sort(function (one, two) {
        var a = one.getAttribute("data-" + by), b = two.getAttribute("data-" + by);
        if (by === "title") return a < b ? -1 : a > b ? 1 : 0;
        return (a === "" ? Infinity : +a) - (b === "" ? Infinity : +b);
      });
    }
    function show() {
      var shown = 0;
      ordered().forEach(function (row) {
        row.hidden = !fits(row);
        shown += row.hidden ? 0 : 1;
        body.appendChild(row);
      });
      form.elements.shown.value = shown + " of " + rows.length + " shown";
    }
    function write() {
      var view = new URLSearchParams();
      names.forEach(function (name) { if (form.elements[name].value) view.set(name, form.elements[name].value); });
      history.replaceState(null, "", view.toString() ? "#" + view : location.pathname + location.search);
      show();
    }
    form.hidden = false;
    form.addEventListener("submit", function (event) { event.preventDefault(); });
    form.addEventListener("input", write);
    window.addEventListener("hashchange", function () { read(); show(); });
    read();
    show();
  }

  document.addEventListener("DOMContentLoaded", function () {
    var search = document.querySelector(".md-search[role=dialog]");
    if (search) search.setAttribute("aria-label", "Search");
    Array.prototype.forEach.call(document.querySelectorAll("[data-bb-filter]"), catalogue);
    // The theme wraps tables of prose in a region that scrolls; a keyboard must reach it.
    function reach() {
      Array.prototype.forEach.call(document.querySelectorAll(".md-typeset__scrollwrap:not([tabindex])"), function (one) {
        one.setAttribute("tabindex", "0");
        one.setAttribute("role", "region");
        one.setAttribute("aria-label", "table");
      });
    }
    reach();
    new MutationObserver(reach).observe(document.body, { childList: true, subtree: true });
  });
})();
