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
      const answer = await window.ebbline.send(here.dataset.draft, draft(form), true);
      sheet.state(form, answer.ok ? "Kept as a draft, not stored as a record." : "The draft could not be kept. Save the part, or keep this page open.");
      return "";
    } catch (error) {
      const out = error.message === "signed out";
      sheet.state(form, out ? "Not kept: you are signed out. What you typed is still here." : "The draft could not be kept: no answer from the server. Keep this page open.");
      return error.message;
    }
  }
  function begin(form) {
    const mine = keep(form).finally(function () { if (underway.get(form) === mine) underway.delete(form); });
    underway.set(form, mine);
  }
  document.addEventListener("input", function (event) {
    const form = event.target.closest("form.part-form");
    if (!form) return;
    form.dataset.typed = "yes";
    clearTimeout(timers.get(form));
    timers.set(form, setTimeout(function () { begin(form); }, wait));
  });
  // A draft still on its way must not arrive after the save that makes it needless.
  sheet.settleDrafts = async function (form) {
    clearTimeout(timers.get(form));
    timers.delete(form);
    // Whoever just put off signing in isn't asked a second time for the same click.
    if (await underway.get(form) === "signed out") throw new Error("signed out");
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
