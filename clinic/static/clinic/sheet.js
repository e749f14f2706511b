/* Visit sheet: drafts, live comparison, one click stores once, an expired session loses nothing. */
"use strict";
(function () {
  const here = document.getElementById("sheet-js");
  const forms = Array.from(document.querySelectorAll("form.part-form"));
  const box = document.getElementById("compare");
  const timers = {};
  let number = 0;
  let newest = 0;

  function payload(form) {
    const out = {};
    new FormData(form).forEach(function (value, name) {
      if (["csrfmiddlewaretoken", "request_id", "part"].includes(name) || name.endsWith("-base_rev")) return;
      (out[name] = out[name] || []).push(value);
    });
    return out;
  }
  function keepDraft(form) {
    const data = new FormData();
    data.append("part", form.dataset.part);
    data.append("payload", JSON.stringify(payload(form)));
    const state = form.querySelector(".draft-state");
    window.ebbline.send(here.dataset.draft, data).then(function (answer) {
      state.textContent = answer.ok ? "Draft kept on the server, not saved as a record." : "";
    }).catch(function () { state.textContent = "The draft could not be kept: no connection. Keep this page open."; });
  }
  function fill(form, values) {
    Array.from(form.elements).forEach(function (field) {
      if (!field.name || ["hidden", "submit", "button"].includes(field.type)) return;
      const given = values[field.name] || [];
      if (field.type === "checkbox" || field.type === "radio") field.checked = given.includes(field.value) || (field.value === "on" && given.length > 0);
      else if (field.name in values) field.value = given[0];
    });
  }
  function line(text, alarm) {
    const p = document.createElement("p");
    p.textContent = text;
    if (alarm) p.className = "emergency";
    return p;
  }
  function show(said) {
    if (Number(said.number) < newest) return;
    newest = Number(said.number);
    const names = { R: "Right eye", L: "Left eye" };
    const ranks = { raise_first: "Raise first", weigh_today: "Weigh today", keep_in_mind: "Keep in mind" };
    box.replaceChildren();
    let alarm = false;
    Object.keys(said.eyes).forEach(function (side) {
      const eye = said.eyes[side];
      if (eye.changes.length) box.append(line(names[side] + ": " + eye.changes.join("; ")));
      eye.raised.forEach(function (row) {
        alarm = alarm || row.alarm;
        box.append(line(ranks[row.rank] + ": " + row.sentence));
      });
      box.append(line(names[side] + ": limits not reached by " + eye.counts.limit_not_reached + " rules; " + eye.counts.could_not_tell + " couldn't tell. Nothing is stored yet."));
    });
    if (alarm) box.prepend(line(said.emergency_text, true));
    box.classList.toggle("alarm", alarm);
    box.hidden = !box.childElementCount;
    document.querySelectorAll(".eye[data-side]").forEach(function (eye) {
      const target = eye.querySelector("[data-implied]");
      if (!target) return;
      const words = said.implied[eye.dataset.side] || {};
      target.textContent = Object.values(words).join(", ");
    });
  }
  function compareNow(form) {
    const data = new FormData(form);
    number += 1;
    data.append("number", String(number));
    window.ebbline.send(here.dataset.compare, data).then(function (answer) {
      return answer.ok ? answer.json() : null;
    }).then(function (said) { if (said) show(said); }).catch(function () {});
  }
  forms.forEach(function (form) {
    form.addEventListener("input", function () {
      form.dataset.typed = "yes";
      clearTimeout(timers[form.dataset.part]);
      timers[form.dataset.part] = setTimeout(function () { keepDraft(form); }, 2000);
    });
    if (form.dataset.part === "measured") form.addEventListener("change", function () { compareNow(form); });
    form.addEventListener("submit", function (event) {
      if (event.submitter && event.submitter.name === "drop") return;
      event.preventDefault();
      clearTimeout(timers[form.dataset.part]);
      const button = form.querySelector(".part-foot button");
      if (button.disabled) return;
      button.disabled = true;
      window.ebbline.send(form.action, new FormData(form)).then(function (answer) {
        form.dataset.typed = "";
        // The redirect's own anchor is lost by fetch; stay at the part that was saved.
        const stored = answer.redirected && answer.ok;
        if (stored) history.replaceState(null, "", new URL(answer.url).pathname + "#part-" + form.dataset.part);
        return answer.text();
      }).then(function (text) {
        document.open();
        document.write(text);
        document.close();
      }).catch(function () {
        button.disabled = false;
        form.querySelector(".draft-state").textContent = "Not saved: no connection. Keep this page open and try again.";
      });
    });
  });
  document.querySelectorAll(".use-draft").forEach(function (button) {
    button.addEventListener("click", function () {
      const form = button.closest("form");
      fill(form, JSON.parse(document.getElementById(button.dataset.part).textContent));
      button.closest(".draft-line").hidden = true;
      if (form.dataset.part === "measured") compareNow(form);
    });
  });
})();
