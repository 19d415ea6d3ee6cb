// Small things that a page cannot say without a script; it reads well without them.
(function () {
  "use strict";
  // Search needs http: from disk a browser refuses the worker that it runs in.
  if (location.protocol === "file:") document.documentElement.setAttribute("data-bb-disk", "");
  document.addEventListener("DOMContentLoaded", function () {
    var search = document.querySelector(".md-search[role=dialog]");
    if (search) search.setAttribute("aria-label", "Search");
  });
})();
