/* Every page: warns before the idle time ends, and signs in again in place so that what was typed
   stays on the page. Other scripts post through `ebbline.send`. */
"use strict";
(function () {
  const again = document.getElementById("sign-in-again");
  if (!again) return;
  const form = document.getElementById("sign-in-again-form");
  const problem = document.getElementById("again-error");
  const warning = document.getElementById("idle-warning");
  const idle = Number(document.body.dataset.idle) * 1000;
  const warn = Number(document.body.dataset.warn) * 1000;
  const headers = { "X-Requested-With": "ebbline" };
  let waiting = [];
  let putOff = false;
  let last = Date.now();

  function token() {
    const field = document.querySelector("input[name=csrfmiddlewaretoken]");
    return field ? field.value : "";
  }
  function renew(fresh) {
    document.querySelectorAll("input[name=csrfmiddlewaretoken]").forEach(function (field) { field.value = fresh; });
  }
  function post(url, data) {
    data.set("csrfmiddlewaretoken", token());
    return fetch(url, { method: "POST", body: data, headers: headers, credentials: "same-origin" });
  }

  // Returns the response. When the session has ended it asks for the password here, then sends again.
  // What runs in the background ("quiet") never asks a second time once signing in was put off.
  async function send(url, data, quiet) {
    last = Date.now();
    const answer = await post(url, data);
    if (answer.status !== 401 && answer.status !== 403) return answer;
    const said = await answer.clone().json().catch(function () { return {}; });
    if (!said.signed_out && !said.old_page) return answer;
    if (quiet && putOff) throw new Error("signed out");
    await signedInAgain();
    return send(url, data, quiet);
  }
  function signedInAgain() {
    if (!again.open) again.showModal();
    return new Promise(function (done, fail) { waiting.push({ done: done, fail: fail }); });
  }
  function settle(how) {
    const those = waiting;
    waiting = [];
    those.forEach(function (one) { one[how](new Error("signed out")); });
  }
  async function signIn() {
    const page = await fetch("/sign-in/", { credentials: "same-origin" });
    const fresh = new DOMParser().parseFromString(await page.text(), "text/html").querySelector("input[name=csrfmiddlewaretoken]");
    if (fresh) renew(fresh.value);
    const said = await (await post(form.action, new FormData(form))).json();
    problem.textContent = said.held ? problem.dataset.held : problem.dataset.wrong;
    if (!said.signed_in) return false;
    if (said.token) renew(said.token);
    document.querySelectorAll(".who").forEach(function (who) { who.textContent = said.name; });
    return true;
  }
  form.addEventListener("submit", async function (event) {
    event.preventDefault();
    const fits = await signIn().catch(function () { return false; });
    form.elements.password.value = "";
    problem.hidden = fits;
    if (!fits) return;
    last = Date.now();
    settle("done");
    putOff = false;
    again.close();
  });
  again.addEventListener("cancel", function () { putOff = true; });
  again.addEventListener("close", function () { settle("fail"); });

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
