"""The main jobs from Python, cell by cell: open it in a notebook, or run it in the checkout.

Each `# %%` begins a cell (VS Code, Spyder and Jupytext know them). What stands alone at the end of
a cell is what a notebook shows: a drawing, a table, a picture. Paths count from the checkout.

The machine is invented and built by nobody. Rotors burst: before one is made, put your supplier's
steel data in, have a qualified engineer look at it, and test it at overspeed in containment.
"""

# %% A design: what its file says, drawn from its own lines and arcs
import subprocess
import sys
from pathlib import Path

from lamwright.app import GridWishes, Ledger, assess, map_design, read_machine, solve
from lamwright.postprocess import all_figures, read_flux_map

DESIGNS = Path("designs")
OUT = Path("out/notebook")

machine = read_machine(DESIGNS / "demo_24s4p_arc.toml")
machine

# %% One field solution: linkages and torque at one current and rotor angle
field = solve(machine, i_d=8.0, i_q=4.0, angle_deg=2.5)
print(f"psi_d {field.psi_d:.3f} V s, psi_q {field.psi_q:.4f} V s, torque {field.torque:.2f} N m")

# %% The verdict: every limit and figure with its error bar; coarse meshes, a few seconds
verdict = assess(machine.path, OUT / "verdict", tolerance="coarse", pictures=False)
verdict

# %% Its figures one by one, each with its unit, and what the mesh may be wrong by
figures = all_figures(verdict)
for key in ("torque_nm", "torque_ripple_percent", "saliency_ratio", "yield_margin"):
    bar = verdict.errors.get(key)
    told = "" if bar is None else f" +- {bar:.2g}"
    print(f"{key}: {figures[key].value:.4g}{told} {figures[key].unit}")

# %% A design that cannot be: every fault with its line, nothing half done
broken = OUT / "broken.toml"
text = machine.path.read_text(encoding="utf-8")
broken.write_text(text.replace("gap_mm = 0.4", "gap_mm = -0.4"), encoding="utf-8")
try:
    read_machine(broken)
except ValueError as error:
    print(error)

# %% A flux map: linkages and torque over the plane of currents (a minute or two)
map_design(machine.path, OUT / "map", GridWishes(points=(5, 5)), tolerance="coarse")
flux_map = read_flux_map(OUT / "map" / "map.nc")
flux_map

# %% A study: 48 rotors on all cores (two or three minutes), those that hold every limit
# By its command: workers of `sweep_study` load the script that calls it anew, so a script would
# need `if __name__ == "__main__":` around all of it; a notebook may call it as it is.
study = DESIGNS / "studies" / "barriers_by_end_angle.toml"
asked = ["sweep", str(study), "--out", str(OUT / "study"), "--no-pictures"]
subprocess.run([sys.executable, "-m", "lamwright.app", *asked], check=True)
with Ledger.read(OUT / "study") as ledger:
    best = ledger.rows("passes", "-torque_nm", 3)
for row in best:
    print(row.number, dict(row.values), f"{row.figures['torque_nm']:.2f} N m")
