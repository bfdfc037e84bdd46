"""Damaged and hostile DXF files of a rotor: each is refused in one line, within 10 s and 1 GiB.

Run as a program, it reads each file in a process of its own under those limits and prints what was
said: `python -m hostile_drawings DESIGN.toml FOLDER NAME...`.
"""

import json
import math
import os
import random
import resource
import sys
from collections.abc import Callable
from itertools import pairwise
from pathlib import Path

SECONDS, BYTES = 10, 1 << 30  # of the processor, of address space
READERS = ("supplier", "drawn rotor")  # of an inspected outline, of a rotor to be analysed as drawn
OVERHEAD = ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS")  # threads reserve address space


def text_of(*entities: str, blocks: str = "", unit: int = 4, version: str = "AC1015") -> bytes:
    """The least DXF file that holds entities and blocks, as group codes and values."""
    header = f"0 SECTION 2 HEADER 9 $ACADVER 1 {version} 9 $INSUNITS 70 {unit} 0 ENDSEC"
    body = f"{header} 0 SECTION 2 BLOCKS {blocks} 0 ENDSEC 0 SECTION 2 ENTITIES"
    return "\n".join(
        [*body.split(), *" ".join(entities).split(), "0", "ENDSEC", "0", "EOF", ""]
    ).encode()


def line(a: complex = 0j, b: complex = 40.0 + 0j) -> str:
    return f"0 LINE 8 0 10 {a.real} 20 {a.imag} 11 {b.real} 21 {b.imag}"


def circle(radius: object = 40.6, x: object = 0.0) -> str:
    return f"0 CIRCLE 8 0 10 {x} 20 0.0 40 {radius}"


def arc(radius: object = 40.6, low: object = 0.0, high: object = 90.0) -> str:
    return f"0 ARC 8 0 10 0.0 20 0.0 40 {radius} 50 {low} 51 {high}"


def polyline(*vertices: tuple[object, object, object]) -> str:
    body = " ".join(f"10 {x} 20 {y} 42 {b}" for x, y, b in vertices)
    return f"0 LWPOLYLINE 100 AcDbEntity 8 0 100 AcDbPolyline 90 {len(vertices)} 70 1 {body}"


def spline(degree: int, knots: list[object], points: list[tuple[object, object]]) -> str:
    body = " ".join(f"40 {k}" for k in knots) + " "
    body += " ".join(f"10 {x} 20 {y} 30 0.0" for x, y in points)
    counts = f"70 8 71 {degree} 72 {len(knots)} 73 {len(points)} 74 0"
    return f"0 SPLINE 100 AcDbEntity 8 0 100 AcDbSpline {counts} {body}"


def ellipse(x: object, ratio: object, low: object = 0.0, high: object = 6.28) -> str:
    head = "0 ELLIPSE 100 AcDbEntity 8 0 100 AcDbEllipse 10 0.0 20 0.0 30 0.0"
    return f"{head} 11 {x} 21 0.0 31 0.0 40 {ratio} 41 {low} 42 {high}"


def block(name: str, *entities: str) -> str:
    head = f"0 BLOCK 8 0 2 {name} 70 0 10 0.0 20 0.0 3 {name}"
    return f"{head} {' '.join(entities)} 0 ENDBLK 8 0"


def insert(name: str, more: str = "") -> str:
    return f"0 INSERT 8 0 2 {name} 10 0.0 20 0.0 {more}"


def chained(depth: int, fan: int, leaf: str) -> bytes:
    """Blocks that insert the next one `fan` times, `depth` deep, the last with `leaf`."""
    blocks = [block(f"b{k}", *[insert(f"b{k + 1}")] * fan) for k in range(depth)]
    return text_of(insert("b0"), blocks=" ".join([*blocks, block(f"b{depth}", leaf)]))


def scribble(count: int, reach: float = 40.0) -> bytes:
    """Lines between random places: each crosses a third of the others."""
    rng = random.Random(4)
    ends = [
        complex(rng.uniform(-reach, reach), rng.uniform(-reach, reach)) for _ in range(count + 1)
    ]
    lines = [line(a, b) for a, b in pairwise(ends)]
    return text_of(circle(), circle(13.0), *lines)


def comb(count: int) -> str:
    """One polyline that winds up and down between bore and rim."""
    points = []
    for k in range(count):
        radius, angle = (14.0, 40.0)[k % 2], 2.0 * math.pi * k / count
        points.append((radius * math.cos(angle), radius * math.sin(angle), 0.0))
    return polyline(*points)


def binary(body: bytes) -> bytes:
    return b"AutoCAD Binary DXF\r\n\x1a\x00" + body


NAN, INF = "nan", "inf"
SMALL: dict[str, Callable[[], bytes]] = {
    "empty": lambda: b"",
    "blanks": lambda: b"\n" * 4000,
    "garbage": lambda: random.Random(1).randbytes(60_000),
    "picture": lambda: b"\x89PNG\r\n\x1a\n" + random.Random(2).randbytes(9000),
    "archive": lambda: b"PK\x03\x04" + random.Random(3).randbytes(9000),
    "text_of_zeros": lambda: b"0\n" * 200_000,
    "one_long_line": lambda: b"SECTION" * 300_000,
    "cut_in_header": lambda: text_of(circle())[:60],
    "cut_in_entities": lambda: text_of(circle(), line())[:-40],
    "cut_in_a_number": lambda: text_of(circle(), line())[:-27],
    "binary_cut": lambda: binary(b"\x00SECTION\x00\x02HEADER\x00\x09$ACADVER"),
    "binary_garbage": lambda: binary(random.Random(5).randbytes(9000)),
    "code_no_number": lambda: text_of(circle()).replace(b"\n40\n", b"\nforty\n"),
    "version_unknown": lambda: text_of(circle(), version="AC9999"),
    "unit_unknown_code": lambda: text_of(circle(), circle(13.0), unit=99),
    "unit_metres": lambda: text_of(circle(), circle(13.0), unit=6),
    "unit_inches": lambda: text_of(circle(), circle(13.0), unit=1),
    "a_thousand_times_small": lambda: text_of(circle(0.0406), circle(0.013)),
    "far_out": lambda: text_of(circle(), circle(13.0), line(0j, 1e15 + 0j)),
    "near_overflow": lambda: text_of(circle(1e308), circle(13.0, 1e308)),
    "number_nan": lambda: text_of(circle(), circle(NAN)),
    "number_infinite": lambda: text_of(circle(), circle(13.0, INF)),
    "number_huge_digits": lambda: text_of(circle(), circle("9" * 400)),
    "bulge_nan": lambda: text_of(polyline((40, 0, NAN), (-40, 0, 1), (0, 40, 0))),
    "bulge_huge": lambda: text_of(polyline((40, 0, 1e300), (-40, 0, 1), (0, 40, 0))),
    "radius_nought": lambda: text_of(circle(0.0), arc(0.0)),
    "radius_huge": lambda: text_of(circle(), circle(13.0), arc(1e200, 0.0, 1e-9)),
    "angles_huge": lambda: text_of(arc(40.6, -1e300, 1e300)),
    "spline_no_points": lambda: text_of(spline(3, [0, 1], [])),
    "spline_degree": lambda: text_of(
        spline(90, list(range(200)), [(k, k % 7) for k in range(109)])
    ),
    "spline_knots_nan": lambda: text_of(spline(2, [NAN] * 6, [(0, 0), (9, 9), (40, 0)])),
    "spline_knots_fall": lambda: text_of(spline(2, [5, 4, 3, 2, 1, 0], [(0, 0), (9, 9), (40, 0)])),
    "spline_in_a_point": lambda: text_of(spline(2, [0, 0, 0, 1, 1, 1], [(7, 7)] * 3)),
    "spline_zigzag": lambda: text_of(
        spline(1, [0, *range(91), 90], [(40 * (k % 2), k % 41) for k in range(91)])
    ),
    "ellipse_flat": lambda: text_of(ellipse(40.6, 0.0)),
    "ellipse_thin": lambda: text_of(ellipse(40.6, 1e-9)),
    "ellipse_nan": lambda: text_of(ellipse(NAN, 1.0)),
    "ellipse_wound": lambda: text_of(ellipse(40.6, 0.7, -1e18, 1e18)),
    "nested_12": lambda: chained(12, 1, circle()),
    "nested_1000": lambda: chained(1000, 1, circle()),
    "block_in_itself": lambda: text_of(insert("b"), blocks=block("b", circle(), insert("b"))),
    "blocks_in_each_other": lambda: text_of(
        insert("b"), blocks=block("b", insert("c")) + " " + block("c", insert("b"))
    ),
    "block_missing": lambda: text_of(insert("nowhere")),
    "all_in_one_point": lambda: text_of(*[line(7j, 7j)] * 50),
    "on_a_line": lambda: text_of(*[line(complex(k), complex(k + 1)) for k in range(40)]),
    "circles_alone": lambda: text_of(*[circle(13.0 + 0.1 * k) for k in range(277)]),
    "tilted": lambda: text_of(circle(), arc() + " 210 1.0 220 0.0 230 1.0"),
    "solid": lambda: text_of(circle(), "0 3DSOLID 8 0 70 1 1 abc"),
    "crossing_300": lambda: scribble(300),
    "comb_300": lambda: text_of(circle(), circle(13.0), comb(300)),
}
LARGE: dict[str, Callable[[], bytes]] = {
    "blocks_ten_by_ten": lambda: chained(7, 10, circle()),
    "empty_blocks_by_hundreds": lambda: chained(7, 100, ""),
    "rows_and_columns": lambda: text_of(
        insert("b", "70 30000 71 30000 44 1.0 45 1.0"), blocks=block("b", line())
    ),
    "rows_of_nothing": lambda: text_of(
        insert("b", "70 30000 71 30000 44 1.0 45 1.0"), blocks=block("b")
    ),
    "entities_without_end": lambda: text_of(*[line(1j * (k % 40)) for k in range(250_000)]),
    "polyline_without_end": lambda: text_of(circle(), comb(400_000)),
    "texts_without_end": lambda: text_of(*["0 TEXT 8 0 10 1 20 1 40 3 1 x"] * 300_000),
    "crossing_6000": lambda: scribble(6000),
    "comb_30000": lambda: text_of(circle(), circle(13.0), comb(30_000)),
    "spline_without_end": lambda: text_of(
        spline(
            3,
            [0, 0, 0, *range(150_001), 150_000, 150_000, 150_000],
            [(40 * math.cos(k), 40 * math.sin(k)) for k in range(150_003)],
        )
    ),
    "spline_through_points": lambda: text_of(
        "0 SPLINE 100 AcDbEntity 8 0 100 AcDbSpline 70 8 71 3 72 0 73 0 74 20000 "
        + " ".join(
            f"11 {40 * math.cos(k):.3f} 21 {40 * math.sin(k):.3f} 31 0" for k in range(20000)
        )
    ),
    "circles_without_end": lambda: text_of(*[circle(0.001 * k) for k in range(1, 40_000)]),
    "two_hundred_megabytes": lambda: b"",  # written by `write`
    "at_the_limit": lambda: text_of(*[line(1j * (k % 40)) for k in range(40_000)]),
}
HOSTILE = {**SMALL, **LARGE}


def write(name: str, folder: Path) -> Path:
    """Write one file."""
    path = folder / f"{name}.dxf"
    if name == "two_hundred_megabytes":
        with path.open("wb") as file:  # with a hole: takes no room on the disk
            file.write(text_of(circle()))
            file.truncate(200_000_000)
    else:
        path.write_bytes(HOSTILE[name]())
    return path


def said(design: Path, path: Path, reader: str) -> str:
    """What a supplier's outline or a drawn rotor's outline is refused with."""
    from lamwright.geometry.cross_section import cross_section
    from lamwright.geometry.design_file import read_design
    from lamwright.geometry.drawn_rotor import recognised_rotor
    from lamwright.geometry.dxf_reader import read_pieces
    from lamwright.geometry.errors import OutlineError
    from lamwright.geometry.supplier_outline import supplier_outline

    section = cross_section(read_design(design))
    try:
        if reader == "supplier":
            supplier_outline(section, path)
        else:
            recognised_rotor(read_pieces(path).edges, 1e-5, section.poles)
    except OutlineError as error:
        return str(error)
    return "accepted"


def read_alone(design: Path, path: Path, reader: str) -> str:
    """`said` in a process of its own under the limits, or how it died."""
    inlet, outlet = os.pipe()
    child = os.fork()
    if child == 0:
        os.close(inlet)
        resource.setrlimit(resource.RLIMIT_CPU, (SECONDS, SECONDS))
        resource.setrlimit(resource.RLIMIT_AS, (BYTES, BYTES))
        try:
            line = said(design, path, reader)
        except BaseException as error:
            line = f"TRACEBACK {type(error).__name__}: {error}"[:300]
        os.write(outlet, line.encode()[:60_000])
        os._exit(0)
    os.close(outlet)
    with os.fdopen(inlet, "rb") as stream:
        data = stream.read()
    _, status, usage = os.wait4(child, 0)
    if "-v" in sys.argv:
        spent = f"{usage.ru_utime + usage.ru_stime:.1f} s, {usage.ru_maxrss // 1024} MiB"
        sys.stderr.write(f"{path.name} {reader}: {spent}\n")
    return data.decode() if data else f"KILLED, status {status}"


def main() -> None:
    """Print what each file named is refused with, as JSON."""
    design, folder, *names = [word for word in sys.argv[1:] if word != "-v"]
    # Imported before the processes are made, so that each costs its own work alone.
    import ezdxf  # noqa: F401
    import scipy.interpolate  # noqa: F401

    from lamwright.geometry import supplier_outline  # noqa: F401

    told = {}
    for name in names:
        path = write(name, Path(folder))
        told[name] = [read_alone(Path(design), path, reader) for reader in READERS]
    print(json.dumps(told))


if __name__ == "__main__":
    main()
