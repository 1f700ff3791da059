"""Sizes of the house: ``python -m tests.house`` prints the longest of each kind."""

import ast
import statistics
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).parents[1]
PACKAGE = ROOT / "digestplan"


@dataclass(frozen=True)
class Function:
    """A function of the package and how long its body is, without its docstring."""

    where: str
    lines: int
    public: bool
    typed: bool


def files() -> list[Path]:
    """Python files of the package."""
    return sorted(PACKAGE.rglob("*.py"))


def file_lengths() -> dict[str, int]:
    """Lines of every file."""
    return {
        str(path.relative_to(ROOT)): len(path.read_text("utf-8").splitlines()) for path in files()
    }


def functions() -> Iterator[Function]:
    """All functions of the package, nested ones too."""
    for path in files():
        for node in ast.walk(ast.parse(path.read_text("utf-8"))):
            if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
                yield _measured(path, node)


def _measured(path: Path, node: ast.FunctionDef | ast.AsyncFunctionDef) -> Function:
    body = node.body[1:] if ast.get_docstring(node) is not None else node.body
    lines = body[-1].end_lineno - body[0].lineno + 1 if body else 0
    arguments = [*node.args.posonlyargs, *node.args.args, *node.args.kwonlyargs]
    typed = node.returns is not None and all(
        a.annotation is not None for a in arguments if a.arg not in {"self", "cls"}
    )
    where = f"{path.relative_to(ROOT)}:{node.lineno} {node.name}"
    return Function(where, lines, not node.name.startswith("_"), typed)


def main() -> None:
    """Print the longest files and functions."""
    lengths = file_lengths()
    measured = sorted(functions(), key=lambda f: -f.lines)
    bodies = sorted(f.lines for f in measured)
    print(f"{len(lengths)} files, {sum(lengths.values())} lines; {len(bodies)} functions")
    print(f"body: median {statistics.median(bodies)}, nine in ten {bodies[len(bodies) * 9 // 10]}")
    for name, lines in sorted(lengths.items(), key=lambda item: -item[1])[:5]:
        print(f"{lines:>5} {name}")
    for function in measured[:5]:
        print(f"{function.lines:>5} {function.where}")


if __name__ == "__main__":
    main()
