// Forms work without this: it saves turns of the page. A list of people is filtered and ticked here,
// and what a sheet comes to is shown while it is filled in. Both come from the server's own page.
(() => {
  "use strict";

  // part sends a form as it stands, with more fields, and gives one part of the page that comes back;
  // null where none does, as without a network: the form's own button is still there.
  const part = async (form, more, selector) => {
    const data = new URLSearchParams(new FormData(form));
    for (const [name, value] of Object.entries(more)) data.set(name, value);
    try {
      const answer = await fetch(form.action, { method: "POST", body: data });
      return new DOMParser().parseFromString(await answer.text(), "text/html").querySelector(selector);
    } catch {
      return null;
    }
  };

  const filter = (crowd) => {
    const value = (name) => crowd.querySelector(`[name=${name}]`)?.value ?? "";
    const words = value("show-find").toLowerCase().split(/\s+/).filter(Boolean);
    const crew = value("show-crew");
    const due = crowd.querySelector("[name=show-due]")?.checked;
    const guests = crowd.querySelector(".guests");
    if (guests && words.length > 0) guests.open = true;
    let shown = 0, ticked = 0;
    for (const line of crowd.querySelectorAll("li")) {
      const box = line.querySelector("[name=people]");
      const fits = (!crew || line.dataset.crew === crew) && words.every((w) => line.dataset.text.includes(w)) && (!due || line.dataset.due);
      line.hidden = !fits && !box.checked && !(guests && !guests.contains(line));
      if (!line.hidden) shown++;
      if (box.checked) ticked++;
    }
    crowd.querySelector(".shown").textContent = shown;
    crowd.querySelector(".ticked").textContent = ticked;
  };

  const tick = (crowd, on) => {
    for (const line of crowd.querySelectorAll("li")) {
      if (!on || !line.hidden) line.querySelector("[name=people]").checked = on;
    }
    filter(crowd);
  };

  for (const form of document.querySelectorAll("form.sheet")) {
    const crowd = () => form.querySelector(".crowd");
    if (!crowd()) continue;
    form.addEventListener("input", (e) => { if (crowd().contains(e.target)) filter(crowd()); });
    form.addEventListener("change", async (e) => {
      if (e.target.matches("select[name=record], select[name=crew]")) {
        const fresh = await part(form, { do: "show" }, ".crowd");
        if (fresh) crowd().replaceWith(fresh);
      }
    });
    form.addEventListener("click", (e) => {
      const button = e.target.closest("button[name=do]");
      if (!button || crowd().dataset.cut) return;
      e.preventDefault();
      if (button.value === "show") filter(crowd());
      else tick(crowd(), button.value === "tick");
    });
    form.addEventListener("keydown", (e) => {
      if (e.key === "Enter" && e.target.name === "show-find" && !crowd().dataset.cut) e.preventDefault();
    });
  }

  const sheet = document.getElementById("sheet");
  if (sheet) {
    let waiting, turn = 0;
    const judge = async () => {
      const mine = ++turn;
      const fresh = await part(sheet, {}, "#result");
      const result = document.getElementById("result");
      if (!fresh || mine !== turn || fresh.innerHTML === result.innerHTML) return;
      const inside = result.contains(document.activeElement);
      result.innerHTML = fresh.innerHTML;
      if (inside) result.querySelector("button").focus();
    };
    sheet.addEventListener("input", () => { clearTimeout(waiting); waiting = setTimeout(judge, 400); });
  }
})();
