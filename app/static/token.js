// The token of this start: from the address's fragment, kept for this tab, told to the other tabs.
//
// A server that starts anew has another token. Who opens its new address in any tab frees the
// others: the new token comes to them through a channel of this origin alone.

const KEY = "lamwright-token";
const channel = new BroadcastChannel("lamwright");
let token = null;

export function takeToken(call) {
  const found = tokenOf(location.hash);
  if (found) {
    history.replaceState(null, "", location.pathname);
    keep(found);
    channel.postMessage({ kind: "token", token: found });
  } else {
    token = sessionStorage.getItem(KEY);
  }
  channel.addEventListener("message", ({ data }) => {
    if (data.kind === "token" && data.token !== token) {
      keep(data.token);
      call();
    }
    if (data.kind === "changed") listeners.forEach((listener) => listener(data.path));
    if (data.kind === "begun") onBegun();
  });
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

// From an address as the server prints it, or the token alone; null if it is neither.
export function giveToken(address) {
  const found = tokenOf(address) ?? (/^[\w-]{20,}$/.test(address.trim()) ? address.trim() : null);
  if (found) {
    keep(found);
    channel.postMessage({ kind: "token", token: found });
  }
  return found;
}

function tokenOf(text) {
  return /#token=([\w-]+)/.exec(text)?.[1] ?? null;
}

function keep(found) {
  token = found;
  sessionStorage.setItem(KEY, found);
}
