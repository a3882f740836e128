"""Compares what two runs of a notebook show: words must agree, numbers within a tolerance.

Of a picture, its texts are compared. Numbers are printed with four digits; the
tolerance leaves room for the last of them.
"""

import json
import re
import sys
from typing import Any, Iterator, List

TOLERANCE = 2e-3  # relative
NUMBER = re.compile(r"(?<![A-Za-z0-9_.])[-+]?\d+(?:\.\d+)?(?:[eE][-+]?\d+)?(?![A-Za-z0-9_])")
WATCHED = ("text/plain", "image/svg+xml")


def shown(cell: dict[str, Any]) -> Iterator[tuple[str, str]]:
    """Kind and text of everything that a cell shows; progress on standard error is left out."""
    for output in cell.get("outputs", []):
        if output["output_type"] == "stream" and output["name"] == "stdout":
            yield "stdout", "".join(output["text"])
        elif output["output_type"] == "error":
            yield "error", output["ename"] + ": " + output["evalue"]
        elif "data" in output:
            if "image/svg+xml" in output["data"]:
                svg = "".join(output["data"]["image/svg+xml"])
                yield "picture", "\n".join(re.findall(r"<(?:title|desc|text)[^>]*>([^<]*)<", svg))
            elif "text/plain" in output["data"]:
                yield "value", "".join(output["data"]["text/plain"])


def differences(want: str, got: str) -> List[str]:
    """Where two texts differ by more than the tolerance."""
    def words(text: str) -> List[str]:
        return NUMBER.sub("#", text).split()

    if words(want) != words(got):
        return [f"words differ:\n--- committed\n{want}\n--- now\n{got}"]
    found = []
    for a, b in zip(NUMBER.findall(want), NUMBER.findall(got)):
        x, y = float(a), float(b)
        if abs(x - y) > TOLERANCE * max(abs(x), abs(y)):
            found.append(f"{a} became {b}")
    return found


def main() -> int:
    committed, now = (json.load(open(path, encoding="utf-8"))["cells"] for path in sys.argv[1:3])
    faults = compared = 0
    if len(committed) != len(now):
        print("the notebooks have different numbers of cells")
        return 1
    for i, (a, b) in enumerate(zip(committed, now)):
        if a["cell_type"] != "code":
            continue
        want, got = list(shown(a)), list(shown(b))
        if [kind for kind, _ in want] != [kind for kind, _ in got]:
            print(f"cell {i}: shows {[k for k, _ in got]}, committed {[k for k, _ in want]}")
            faults += 1
            continue
        for (kind, x), (_, y) in zip(want, got):
            compared += 1
            for difference in differences(x, y):
                print(f"cell {i}, {kind}: {difference}")
                faults += 1
    print(f"{compared} outputs compared, {faults} differences")
    return 1 if faults or compared == 0 else 0


sys.exit(main())
