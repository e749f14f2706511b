/* Clinic list: filter, and single keys that never act while somebody types. */
"use strict";
(function () {
  const blocks = Array.from(document.querySelectorAll(".block"));
  const filter = document.getElementById("filter");
  const only = document.getElementById("only-raised");
  let at = -1;

  function shown() { return blocks.filter(function (block) { return !block.hidden; }); }
  function apply() {
    const word = filter.value.trim().toLowerCase();
    blocks.forEach(function (block) {
      const fits = !word || block.textContent.toLowerCase().includes(word);
      block.hidden = !fits || (only.checked && block.dataset.raised !== "yes");
    });
    at = -1;
  }
  function move(step) {
    const list = shown();
    if (!list.length) return;
    at = Math.min(Math.max(at + step, 0), list.length - 1);
    list[at].focus();
    list[at].scrollIntoView({ block: "nearest" });
  }
  filter.addEventListener("input", apply);
  only.addEventListener("change", apply);
  document.addEventListener("keydown", function (event) {
    const field = event.target.closest("input, textarea, select, [contenteditable]");
    if (field || event.ctrlKey || event.metaKey || event.altKey) return;
    const key = event.key.toLowerCase();
    if (key === "j") move(1);
    else if (key === "k") move(-1);
    else if (key === "o" && at >= 0) window.location = shown()[at].dataset.sheet;
    else if (key === "f") { filter.focus(); event.preventDefault(); }
  });
})();
