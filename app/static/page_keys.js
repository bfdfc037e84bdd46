// Which key does what; the help shows this list.

export function pageKeys(keys, act, host) {
  const design = "Design";
  keys.add(design, "Ctrl+Z", "undo", act.undo);
  keys.add(design, ["Ctrl+Shift+Z", "Ctrl+Y"], "redo", act.redo);
  keys.add(design, "Ctrl+S", "save the design file", act.save);
  keys.add(design, "Ctrl+Shift+S", "save under another name", act.saveAs);
  keys.add(design, "b", "back to what the file says", act.discard);
  keys.add(design, "o", "choose another design", act.design);
  keys.add(design, "r", "release for manufacture", act.release);
  const marks = "Marks on the drawing";
  keys.add(marks, "d", "go to the marks; Tab to the next", act.marks);
  keys.add(marks, "Arrow keys", "step the value; with Shift a tenth of it");
  keys.add(marks, "Page keys", "ten steps");
  keys.add(marks, "Home or End", "to the least or the most");
  keys.add(marks, "Enter", "accept");
  keys.add(marks, "Escape", "give the change up");
  keys.add(marks, "f", "go to the findings", act.findings);
  const view = "View";
  keys.add(view, "g", "go to the drawing; arrow keys move it", act.sheet);
  keys.add(view, ["+", "="], "larger", act.larger);
  keys.add(view, ["-"], "smaller", act.smaller);
  keys.add(view, "0", "the whole drawing", act.fit);
  keys.add(view, "9", "the rotor alone", act.rotor);
  keys.add(view, "1", "outline", () => act.picture("outline"));
  keys.add(view, "2", "flux density", () => act.picture("b"));
  keys.add(view, "3", "potential", () => act.picture("a"));
  keys.add(view, "4", "stress", () => act.picture("stress"));
  keys.add(view, "k", "keep this design to compare with", act.keep);
  keys.add(view, "c", "end the comparison", act.drop);
  keys.add(view, "l", "light, dark, or as the system", act.theme);
  const verdict = "Verdict and studies";
  keys.add(verdict, "Ctrl+Enter", "full verdict", act.full);
  keys.add(verdict, "x", "stop the full verdict", act.stop);
  keys.add(verdict, "v", "verdict", () => act.tab("verdict"));
  keys.add(verdict, "t", "design file's text", () => act.tab("text"));
  keys.add(verdict, "s", "study", () => act.tab("study"));
  keys.add(verdict, "w", "sweep the chosen study", act.sweep);
  keys.add(verdict, "?", "these keys", act.help);
  keys.list(host);
}
