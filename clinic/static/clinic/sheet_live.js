/* Visit sheet: on leaving a field says what the typed values would read as, under each eye. Posts
   are numbered and late answers dropped; a failure here never stands in the way of saving. */
"use strict";
(function () {
  const here = document.getElementById("sheet-js");
  let number = 0;
  let newest = 0;

  function line(text, name) {
    const p = document.createElement("p");
    p.textContent = text;
    if (name) p.className = name;
    return p;
  }
  function read(box, eye) {
    box.replaceChildren();
    if (!eye) { box.hidden = true; return; }
    box.append(line("As typed, not stored:", "hint"));
    if (eye.changes.length) box.append(line(eye.changes.join("; ")));
    eye.raised.forEach(function (row) { box.append(line(row.rank_words + ": " + row.sentence, row.rank)); });
    box.append(line(eye.counts + ".", "hint"));
    box.hidden = false;
  }
  function show(form, said) {
    if (Number(said.number) < newest || !form.isConnected) return;
    newest = Number(said.number);
    form.querySelectorAll(".eye[data-side]").forEach(function (card) {
      const side = card.dataset.side;
      const implied = said.implied[side] || {};
      card.querySelectorAll("[data-implied]").forEach(function (target) { target.textContent = implied[target.dataset.implied] || ""; });
      read(card.querySelector("[data-compare]"), said.eyes[side]);
    });
  }
  async function compare(form) {
    const data = new FormData(form);
    number += 1;
    data.set("number", String(number));
    try {
      const answer = await window.ebbline.send(here.dataset.compare, data, true);
      if (answer.ok) show(form, await answer.json());
    } catch (error) { /* The next field left asks again. */ }
  }
  // A part that came back, or a draft: say again what its values read as.
  function again() {
    const form = document.querySelector("form.part-form[data-part=measured][data-typed=yes]");
    if (form) compare(form);
  }
  // The site's emergency text doesn't wait for the server.
  function alarm(box) {
    const ticked = box.querySelector("input[name$=-symptoms_now]:checked");
    box.querySelector("[data-alarm]").hidden = !ticked;
  }
  document.addEventListener("change", function (event) {
    const form = event.target.closest("form.part-form[data-part=measured]");
    if (!form) return;
    const box = event.target.closest("[data-symptoms]");
    if (box) alarm(box);
    compare(form);
  });
  window.ebblineSheet.compareAgain = again;
  again();
})();
