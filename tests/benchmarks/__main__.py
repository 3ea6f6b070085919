"""`python -m tests.benchmarks [NAME...]`: the project's figures of speed, measured on this computer.

Every module of this folder without a leading underscore is a benchmark; its `run()` prints its figures.
"""

from __future__ import annotations

import importlib
import pkgutil
import sys

import tests.benchmarks


def names() -> list[str]:
    """The benchmarks there are."""
    return [
        module.name
        for module in pkgutil.iter_modules(tests.benchmarks.__path__)
        if not module.name.startswith("_")
    ]


def main(wanted: list[str]) -> int:
    """Run those wanted, or all; 2 for an unknown name."""
    known = names()
    unknown = [name for name in wanted if name not in known]
    if unknown:
        print(f"no benchmark {', '.join(unknown)}; there are: {', '.join(known)}", file=sys.stderr)
        return 2
    for name in wanted or known:
        print(f"{name}:", flush=True)
        importlib.import_module(f"tests.benchmarks.{name}").run()
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
