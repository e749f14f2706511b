/* Visit sheet: Enter goes to the next value and past what the station keeps; Ctrl+Enter saves. */
"use strict";
(function () {
  function isStop(field) {
    if (field.type === "hidden" || field.disabled || !field.checkVisibility()) return false;
    if ("station" in field.dataset && field.value) return false;
    // A group of boxes is one stop: its first. Space ticks, Tab goes through the rest.
    const group = field.closest(".checks");
    return !group || group.querySelector("input") === field;
  }
  function next(form, field) {
    const all = Array.from(form.querySelectorAll("input, select, .part-foot button"));
    return all.slice(all.indexOf(field) + 1).find(isStop);
  }
  document.addEventListener("keydown", function (event) {
    const form = event.target.closest("form.part-form");
    if (!form || event.key !== "Enter" || event.isComposing) return;
    if (event.ctrlKey || event.metaKey) {
      event.preventDefault();
      form.requestSubmit();
    } else if (event.target.matches("input, select") && event.target.name !== "reason") {
      event.preventDefault();
      const target = next(form, event.target);
      if (target) target.focus();
      if (target && target.type === "text") target.select();
    }
  });
})();
