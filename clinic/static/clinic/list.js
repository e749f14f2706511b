/* Clinic list: filter, and single keys that never act while somebody types and can be turned off.
   Whether they are on is all that is kept in the browser. */
"use strict";
(function () {
  const blocks = Array.from(document.querySelectorAll(".block"));
  const filter = document.getElementById("filter");
  const only = document.getElementById("only-raised");
  const keysOn = document.getElementById("keys-on");
  const told = document.getElementById("filtered");

  function shown() { return blocks.filter(function (block) { return !block.hidden; }); }
  function apply() {
    const word = filter.value.trim().toLowerCase();
    blocks.forEach(function (block) {
      const fits = !word || block.textContent.toLowerCase().includes(word);
      block.hidden = !fits || (only.checked && block.dataset.raised !== "yes");
    });
    const left = shown().length;
    told.textContent = left === blocks.length ? "" : left + " of " + blocks.length + " patients shown";
  }
  function current() { return document.activeElement.closest(".block"); }
  function move(step) {
    const list = shown();
    const from = list.indexOf(current());
    const to = list[from < 0 ? (step > 0 ? 0 : list.length - 1) : Math.min(Math.max(from + step, 0), list.length - 1)];
    if (!to) return;
    to.focus();
    to.scrollIntoView({ block: "nearest" });
  }
  const acts = {
    n: function () { move(1); },
    b: function () { move(-1); },
    s: function () { const block = current(); if (block && block.dataset.sheet) window.location = block.dataset.sheet; },
    t: function () { const button = current() && current().querySelector("[data-tick]"); if (button) button.click(); },
    l: function () { filter.focus(); }
  };
  filter.addEventListener("input", apply);
  only.addEventListener("change", apply);
  keysOn.checked = localStorage.getItem("ebbline-list-keys") !== "off";
  keysOn.addEventListener("change", function () { localStorage.setItem("ebbline-list-keys", keysOn.checked ? "on" : "off"); });
  document.addEventListener("keydown", function (event) {
    const typing = event.target.closest("input:not([type=checkbox]), textarea, select, dialog, [contenteditable]");
    const act = acts[event.key.toLowerCase()];
    if (typing || !act || !keysOn.checked || event.ctrlKey || event.metaKey || event.altKey) return;
    event.preventDefault();
    act();
  });
  // After ticking, the page comes back to the same patient.
  const back = window.location.hash && document.getElementById(window.location.hash.slice(1));
  if (back) back.focus();
})();
