/* Every page: warns before the idle time ends, signs in again in place, keeps the typed page. */
"use strict";
(function () {
  const body = document.body;
  const again = document.getElementById("sign-in-again");
  if (!again) return;
  const idle = Number(body.dataset.idle) * 1000;
  const warn = Number(body.dataset.warn) * 1000;
  const warning = document.getElementById("idle-warning");
  let last = Date.now();
  let resume = null;

  function token() {
    const field = document.querySelector("input[name=csrfmiddlewaretoken]");
    return field ? field.value : "";
  }
  function renew(fresh) {
    document.querySelectorAll("input[name=csrfmiddlewaretoken]").forEach(function (field) { field.value = fresh; });
  }

  // Returns a promise of a response; a 401 asks for the password in place, then sends it again.
  function send(url, data) {
    last = Date.now();
    const form = data instanceof FormData ? data : new URLSearchParams(data);
    return fetch(url, {
      method: "POST",
      body: form,
      headers: { "X-Requested-With": "ebbline", "X-CSRFToken": token() },
      credentials: "same-origin"
    }).then(function (answer) {
      if (answer.status !== 401 && answer.status !== 403) return answer;
      return answer.clone().json().then(function (said) {
        if (!said.signed_out && !said.old_page) return answer;
        return ask().then(function () { return send(url, data); });
      }, function () { return answer; });
    });
  }
  function ask() {
    if (!again.open) again.showModal();
    return new Promise(function (done) { resume = done; });
  }
  document.getElementById("sign-in-again-form").addEventListener("submit", function (event) {
    event.preventDefault();
    const form = event.target;
    fetch("/sign-in/", { credentials: "same-origin" }).then(function (page) { return page.text(); }).then(function (text) {
      const found = /name="csrfmiddlewaretoken" value="([^"]+)"/.exec(text);
      if (found) renew(found[1]);
      const data = new FormData(form);
      return fetch(form.action, { method: "POST", body: data, credentials: "same-origin", headers: { "X-Requested-With": "ebbline", "X-CSRFToken": token() } });
    }).then(function (answer) { return answer.json(); }).then(function (said) {
      document.getElementById("again-error").hidden = said.signed_in;
      if (!said.signed_in) return;
      if (said.token) renew(said.token);
      form.elements.password.value = "";
      again.close();
      last = Date.now();
      if (resume) { const done = resume; resume = null; done(); }
    });
  });
  ["keydown", "pointerdown"].forEach(function (name) {
    document.addEventListener(name, function () { last = Date.now(); }, { passive: true });
  });
  document.getElementById("stay").addEventListener("click", function () {
    fetch("/health/?stay=1", { credentials: "same-origin" });
    last = Date.now();
    warning.hidden = true;
  });
  setInterval(function () {
    const quiet = Date.now() - last;
    warning.hidden = !(quiet > idle - warn && quiet < idle);
  }, 5000);
  window.ebbline = { send: send };
})();
