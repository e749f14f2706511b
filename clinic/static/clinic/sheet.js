/* Visit sheet: saves one part without touching what is typed in the others. A second click while
   a part is on its way is dropped; the hidden id of the post makes a repeated one harmless. */
"use strict";
(function () {
  const sheet = { number: 0 };
  window.ebblineSheet = sheet;
  sheet.forms = function () { return Array.from(document.querySelectorAll("form.part-form")); };
  sheet.state = function (form, text) { form.querySelector(".draft-state").textContent = text; };

  function said(page, part) {
    const box = page.querySelector(".messages");
    if (!box) return;
    part.querySelector("h2").after(document.importNode(box, true));
  }
  // Parts nobody is typing in follow what is stored now; a part with typing in it stays as it is.
  function followOthers(page, name) {
    sheet.forms().forEach(function (form) {
      const other = form.dataset.part;
      const fresh = page.getElementById("part-" + other);
      if (other !== name && form.dataset.typed !== "yes" && fresh) form.closest("section").replaceWith(document.importNode(fresh, true));
    });
  }
  async function show(text, name, stored) {
    const page = new DOMParser().parseFromString(text, "text/html");
    const fresh = page.getElementById("part-" + name);
    if (!fresh) {
      if (sheet.keepAll) await sheet.keepAll();
      document.getElementById("main").replaceChildren(...document.importNode(page.getElementById("main"), true).childNodes);
      document.title = page.title;
      window.scrollTo(0, 0);
      document.getElementById("main").focus();
      return;
    }
    const part = document.importNode(fresh, true);
    document.getElementById("part-" + name).replaceWith(part);
    if (stored) {
      said(page, part);
      followOthers(page, name);
      const parts = page.querySelector("nav.parts");
      if (parts) document.querySelector("nav.parts").replaceWith(document.importNode(parts, true));
    } else {
      part.querySelector("form").dataset.typed = "yes";
    }
    goTo(part, stored);
    if (name === "measured" && sheet.compareAgain) sheet.compareAgain();
  }
  function goTo(part, stored) {
    const wrong = stored ? null : part.querySelector("[aria-invalid=true], .wrong input, .wrong");
    const target = wrong || part.querySelector(".message") || part.querySelector("h2");
    if (!target.matches("input, select, button")) target.tabIndex = -1;
    target.focus();
    target.scrollIntoView({ block: "center" });
  }
  async function save(form, submitter) {
    const name = form.dataset.part;
    const drop = submitter && submitter.name === "drop";
    form.dataset.busy = "yes";
    try {
      if (sheet.settleDrafts) await sheet.settleDrafts(form);
      const data = new FormData(form);
      if (drop) data.set("drop", "yes");
      const answer = await window.ebbline.send(drop ? submitter.formAction : form.action, data);
      if (answer.status >= 500) throw new Error("server");
      await show(await answer.text(), name, answer.ok);
    } catch (error) {
      sheet.state(form, error.message === "signed out" ? "Not saved: you are signed out. What you typed is still here; save again to sign in." : "Not saved: the server didn't answer. What you typed is still here; try again.");
    } finally {
      delete form.dataset.busy;
    }
  }
  // A refusal speaks of the value that was sent; once that changes it would only mislead.
  document.addEventListener("input", function (event) {
    const refusal = event.target.id && document.getElementById(event.target.id + "_error");
    if (!refusal) return;
    refusal.remove();
    event.target.removeAttribute("aria-invalid");
  });
  document.addEventListener("submit", function (event) {
    const form = event.target.closest("form.part-form");
    if (!form) return;
    event.preventDefault();
    if (!form.dataset.busy) save(form, event.submitter);
  });
})();
