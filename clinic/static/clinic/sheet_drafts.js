/* Visit sheet: keeps unsaved typing on the server two seconds after typing stops, and at once when
   the page is left. The server puts it back; nothing of health stays in the browser. */
"use strict";
(function () {
  const sheet = window.ebblineSheet;
  const here = document.getElementById("sheet-js");
  const wait = 2000;
  const timers = new Map();
  const underway = new Map();

  function payload(form) {
    const out = { kind: [here.dataset.kind] };
    new FormData(form).forEach(function (value, name) {
      if (["csrfmiddlewaretoken", "request_id", "part"].includes(name) || name.endsWith("-keep")) return;
      (out[name] = out[name] || []).push(value);
    });
    return out;
  }
  function draft(form) {
    const data = new FormData();
    data.set("part", form.dataset.part);
    data.set("payload", JSON.stringify(payload(form)));
    return data;
  }
  async function keep(form) {
    timers.delete(form);
    try {
      const answer = await window.ebbline.send(here.dataset.draft, draft(form));
      sheet.state(form, answer.ok ? "Kept as a draft, not stored as a record." : "The draft could not be kept. Save the part, or keep this page open.");
    } catch (error) {
      sheet.state(form, "The draft could not be kept: no answer from the server. Keep this page open.");
    }
  }
  document.addEventListener("input", function (event) {
    const form = event.target.closest("form.part-form");
    if (!form) return;
    form.dataset.typed = "yes";
    clearTimeout(timers.get(form));
    timers.set(form, setTimeout(function () { underway.set(form, keep(form)); }, wait));
  });
  // A draft still on its way must not arrive after the save that makes it needless.
  sheet.settleDrafts = async function (form) {
    clearTimeout(timers.get(form));
    timers.delete(form);
    await underway.get(form);
  };
  // Before another page takes this one's place: keep what was typed a moment ago.
  sheet.keepAll = async function () {
    const typed = Array.from(timers.keys());
    typed.forEach(function (form) { clearTimeout(timers.get(form)); });
    await Promise.all(typed.filter(function (form) { return form.isConnected; }).map(keep));
  };
  window.addEventListener("pagehide", function () {
    timers.forEach(function (timer, form) {
      clearTimeout(timer);
      const data = draft(form);
      data.set("csrfmiddlewaretoken", form.elements.csrfmiddlewaretoken.value);
      fetch(here.dataset.draft, { method: "POST", body: data, headers: { "X-Requested-With": "ebbline" }, credentials: "same-origin", keepalive: true });
    });
    timers.clear();
  });
})();
