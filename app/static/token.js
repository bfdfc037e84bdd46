// The token of this start: from the address's fragment, kept for this tab, told to the other tabs.
//
// A server that starts anew has another token. Who opens its new address in any tab frees the
// others: the new token comes to them through a channel of this origin alone. A token is kept and
// told once the server has taken it; till then it is one to try, so that an address with a wrong
// one, wherever it was found, takes the right one from no tab.

const KEY = "lamwright-token";
const TO_TRY = "lamwright-tokens-to-try"; // outlive a reload: the address that brought them is clean by then
const MOST_TRIED = 4;
const channel = new BroadcastChannel("lamwright");
let token = null;
let others = []; // to be tried when the server does not take `token`, the newest first

// `call`: there is another token to try.
export function takeToken(call) {
  token = fromAddress() ?? sessionStorage.getItem(KEY);
  offer(sessionStorage.getItem(KEY));
  for (const one of JSON.parse(sessionStorage.getItem(TO_TRY) ?? "[]").reverse()) offer(one);
  if (token) remember();
  window.addEventListener("hashchange", () => offer(fromAddress()) && call());
  channel.addEventListener("message", ({ data }) => {
    if (data.kind === "token" && offer(data.token)) call();
    if (data.kind === "changed") listeners.forEach((listener) => listener(data.path));
    if (data.kind === "begun") onBegun();
  });
}

// The server has taken it.
export function tokenIsTaken() {
  others = [];
  sessionStorage.removeItem(TO_TRY);
  if (sessionStorage.getItem(KEY) === token) return;
  sessionStorage.setItem(KEY, token);
  channel.postMessage({ kind: "token", token });
}

// The server does not take it: whether there is another one, which is the current one now.
export function tryAnother() {
  if (!others.length) return false;
  token = others.shift();
  return true;
}

function fromAddress() {
  const found = tokenOf(location.hash);
  if (found) history.replaceState(null, "", location.pathname);
  return found;
}

function offer(found) {
  if (!found || found === token) return false;
  others = [found, ...others.filter((one) => one !== found)].slice(0, MOST_TRIED);
  remember();
  return true;
}

function remember() {
  sessionStorage.setItem(TO_TRY, JSON.stringify([...others, token].filter(Boolean)));
}

const listeners = [];

// Another tab has changed the draft or the file of a design.
export function onChangedElsewhere(listener) {
  listeners.push(listener);
}

export function tellChanged(path) {
  channel.postMessage({ kind: "changed", path });
}

let onBegun = () => {};

// Another tab has begun a full verdict.
export function onBegunElsewhere(call) {
  onBegun = call;
}

export function tellBegun() {
  channel.postMessage({ kind: "begun" });
}

export function currentToken() {
  return token ?? "";
}

// Take a typed address, as the server prints it, or the token alone: null, or a line that says why not.
export async function giveToken(address) {
  const found = tokenOf(address) ?? (/^[\w-]{20,}$/.test(address) ? address : null);
  if (!found) return "no address of a page; accepted http://127.0.0.1:\u2026/#token=\u2026";
  try {
    const answer = await fetch("/api/page", { headers: { "X-Page-Token": found } });
    if (!answer.ok) return (await answer.json()).error;
  } catch {
    return "the server does not answer";
  }
  offer(found);
  return null;
}

function tokenOf(text) {
  return /#token=([\w-]+)/.exec(text)?.[1] ?? null;
}
