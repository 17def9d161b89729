"use strict";

/* Which nets are joined to the supply: union-find over the poles; contacts conduct both ways. */
function liveNets(model, operated) {
  const above = Array.from({ length: model.nets }, (_, net) => net);
  const root = (net) => {
    while (above[net] !== net) {
      above[net] = above[above[net]];
      net = above[net];
    }
    return net;
  };
  for (const [relay, common, make, rest] of model.poles) {
    const end = operated[relay] ? make : rest;
    if (end !== null) above[root(common)] = root(end);
  }
  const supply = root(model.supply);
  return above.map((_, net) => root(net) === supply);
}

/* One live drawing: `positions` holds the relays of the rows alone, repeaters follow theirs. */
class LiveDrawing {
  constructor(root) {
    this.root = root;
    this.model = JSON.parse(root.querySelector("script.model").textContent);
    this.positions = this.model.relays.map(() => false);
    this.step = -1;
    this.passed = [];
    root.classList.add("running");
    for (const button of root.querySelectorAll("button.relay")) {
      button.addEventListener("click", () => this.move(Number(button.dataset.relay)));
    }
    for (const hit of root.querySelectorAll(".hit")) {
      hit.addEventListener("click", () => this.move(Number(hit.dataset.relay)));
    }
    root.querySelector("button.release").addEventListener("click", () => this.releaseAll());
    if (this.model.steps.length) {
      this.select = root.querySelector("select.step");
      this.select.addEventListener("change", () => this.goTo(Number(this.select.value)));
      this.back = root.querySelector("button.before");
      this.back.addEventListener("click", () => this.goBack());
      this.goTo(0);
    } else {
      this.show();
    }
  }

  move(relay) {
    const leader = this.model.relays[relay].follows;
    this.positions[leader] = !this.positions[leader];
    this.find();
  }

  releaseAll() {
    this.positions.fill(false);
    this.find();
  }

  /* After a relay was moved by hand: the step of the list that this is, if it is one. */
  find() {
    const { steps, columns } = this.model;
    const here = (step) => columns.every((relay, i) => step.positions[i] === Number(this.positions[relay]));
    const onward = this.step < 0 ? [] : steps[this.step].next;
    const next = onward.find((index) => here(steps[index]));
    this.passed = [];
    this.step = next === undefined ? steps.findIndex(here) : next;
    this.show();
  }

  goTo(index) {
    if (index >= 0) {
      if (this.step >= 0) this.passed.push(this.step);
      this.setStep(index);
    } else {
      this.step = -1;
      this.passed = [];
      this.show();
    }
  }

  goBack() {
    const before = this.passed.pop();
    this.setStep(before === undefined ? Math.max(0, this.step - 1) : before);
  }

  setStep(index) {
    this.step = index;
    const { positions } = this.model.steps[index];
    this.model.columns.forEach((relay, i) => { this.positions[relay] = Boolean(positions[i]); });
    this.show();
  }

  show() {
    const { model, root } = this;
    const operated = model.relays.map((relay) => this.positions[relay.follows]);
    const live = liveNets(model, operated);
    const on = model.loads.map((load) => load.net !== null && live[load.net]);
    this.draw(operated, live, on);
    for (const button of root.querySelectorAll("button.relay")) {
      const moved = operated[Number(button.dataset.relay)];
      button.setAttribute("aria-pressed", String(moved));
      button.querySelector(".position").textContent = moved ? "operated" : "released";
    }
    const row = model.columns.reduce((sum, relay, bit) => sum + (operated[relay] ? 2 ** bit : 0), 0);
    this.list(on, row);
    this.tell(operated, on, row);
    if (model.steps.length) this.showSteps();
  }

  draw(operated, live, on) {
    const { root } = this;
    const svg = root.querySelector("svg");
    for (const mark of svg.querySelectorAll("[data-net]")) {
      mark.classList.toggle("joined", live[Number(mark.dataset.net)]);
    }
    for (const blade of svg.querySelectorAll(".blade")) {
      const there = operated[Number(blade.dataset.relay)] ? blade.dataset.operated : blade.dataset.released;
      const [x, y] = there.split(",");
      blade.setAttribute("x2", x);
      blade.setAttribute("y2", y);
    }
    for (const text of svg.querySelectorAll("text[data-relay]")) {
      text.classList.toggle("operated", operated[Number(text.dataset.relay)]);
    }
    for (const mark of svg.querySelectorAll("[data-load]")) {
      mark.classList.toggle("on", on[Number(mark.dataset.load)]);
    }
    for (const lamp of svg.querySelectorAll(".lamp")) {
      lamp.textContent = on[Number(lamp.dataset.load)] ? "ON" : "off";
    }
    const names = this.model.columns.filter((relay) => operated[relay]).map((relay) => this.model.relays[relay].name);
    for (const note of svg.querySelectorAll(".drawn")) {
      note.dataset.released ??= note.textContent;
      note.textContent = names.length ? "shown with some relays operated" : note.dataset.released;
    }
  }

  list(on, row) {
    for (const line of this.root.querySelectorAll("table.loads tr[data-load]")) {
      const index = Number(line.dataset.load);
      const { wanted } = this.model.loads[index];
      line.classList.toggle("on", on[index]);
      line.querySelector(".is").textContent = on[index] ? "ON" : "off";
      const words = { 1: "on", 0: "off", "-": "left open" };
      line.querySelector(".wanted").textContent = wanted === null ? "not told here" : words[wanted[row]];
    }
  }

  /* The state in words, for ears as well as for eyes. */
  tell(operated, on, row) {
    const { model } = this;
    const named = (list) => (list.length ? list.join(", ") : "none");
    const relays = model.columns.filter((relay) => operated[relay]).map((relay) => model.relays[relay].name);
    const lit = model.loads.filter((_, i) => on[i]).map((load) => load.name);
    const dark = model.loads.filter((_, i) => !on[i]).map((load) => load.name);
    const said = [`Row ${row}. Operated: ${named(relays)}. On: ${named(lit)}. Off: ${named(dark)}.`];
    const waiting = model.columns
      .filter((relay) => model.relays[relay].coil !== null && on[model.relays[relay].coil] !== operated[relay])
      .map((relay) => ({ relay, slow: model.relays[relay].slow[Number(operated[relay])] }))
      .sort((one, other) => Number(one.slow) - Number(other.slow))
      .map(({ relay, slow }) => `${model.relays[relay].name} ${operated[relay] ? "releases" : "operates"}${slow ? " slowly" : ""}`);
    if (model.steps.length) said.push(waiting.length ? `By their coils: ${waiting.join(", ")}.` : "No relay moves by its coil.");
    this.root.querySelector(".state").textContent = said.join(" ");
  }

  /* A button for each way on from this step. */
  showSteps() {
    const { steps } = this.model;
    const onward = this.root.querySelector(".onward");
    const held = onward.contains(document.activeElement);
    this.select.value = String(this.step);
    this.back.disabled = this.step <= 0 && !this.passed.length;
    const ways = this.step < 0 ? [{ text: "To the first step", index: 0 }]
      : steps[this.step].next.map((index, i) => ({ text: `Step on: ${steps[this.step].moves[i]}`, index }));
    onward.replaceChildren(...ways.map(({ text, index }) => {
      const button = document.createElement("button");
      button.type = "button";
      button.textContent = text;
      button.addEventListener("click", () => this.goTo(index));
      return button;
    }));
    if (held) onward.querySelector("button")?.focus();
  }
}

for (const root of document.querySelectorAll(".live")) new LiveDrawing(root);
