"""From a Case to checked parameters, all of its author's mistakes at once; nothing is executed."""

from collections.abc import Collection, Mapping
from dataclasses import dataclass, field
from typing import Any, Protocol

from bandbook.cases.book import Book
from bandbook.cases.embed import embedded
from bandbook.cases.fences import Block
from bandbook.cases.read import Case
from bandbook.cases.references import QuantityPattern, Reference, read_references
from bandbook.cases.resolve import ParameterUse, resolve
from bandbook.cases.workings import bound_names
from bandbook.errors import Problem
from bandbook.parameters import NAME, near

Checked = dict[str, Any]


class Vocabulary(Protocol):
    """What the checker asks of those who know systems and questions."""

    def check_system(self, given: Mapping[str, Any]) -> tuple[Checked | None, list[Problem]]:
        """Check a system block."""
        ...

    def check_study(
        self, given: Mapping[str, Any], systems: Mapping[str, Checked | None]
    ) -> tuple[Checked | None, list[Problem]]:
        """Check a study block against the systems of its case."""
        ...

    def quantity_names(self, question: str) -> Collection[QuantityPattern]:
        """Return the quantities that a question promises."""
        ...


@dataclass(frozen=True)
class CheckedCase:
    """A case after its check.

    Attributes:
        case: The case.
        parameters: What crosses to the kernel, plain JSON; ``None`` when there are mistakes.
        references: Values that its quantities are compared with.
        recorded: Values kept as recorded.
        uses: Places that rest on parameter sets.
        problems: Every mistake, placed, in file order.
        blocks: Study, or ``step-n`` of a workings block → line of its fence.
    """

    case: Case
    parameters: Checked | None = None
    references: tuple[Reference, ...] = ()
    recorded: tuple[Reference, ...] = ()
    uses: tuple[ParameterUse, ...] = ()
    problems: tuple[Problem, ...] = ()
    blocks: Mapping[str, int] = field(default_factory=dict)


@dataclass
class _Desk:
    """What is gathered while a case is checked."""

    case: Case
    book: Book
    vocabulary: Vocabulary
    problems: list[Problem] = field(default_factory=list)
    uses: list[ParameterUse] = field(default_factory=list)
    systems: dict[str, Checked | None] = field(default_factory=dict)
    studies: dict[str, Checked | None] = field(default_factory=dict)
    questions: dict[str, str] = field(default_factory=dict)
    workings: list[str] = field(default_factory=list)
    steps: list[list[Any]] = field(default_factory=list)
    blocks: dict[str, int] = field(default_factory=dict)

    def note(self, block: Block, problems: list[Problem]) -> None:
        """Place problems of a block at their lines."""
        self.problems += [
            problem if problem.line else problem.at(self.case.file, block.line_of(problem.key)) for problem in problems
        ]

    def resolved(self, block: Block) -> dict[str, Any]:
        """Return the block's table with references to parameter sets replaced."""
        table, uses, problems = resolve(dict(block.table), self.book.sets, block=block.line)
        self.uses += uses
        self.note(block, problems)
        return dict(table)


def check_case(case: Case, book: Book, vocabulary: Vocabulary) -> CheckedCase:
    """Check a case: systems, then studies and workings in file order, then reference values and front matter."""
    desk = _Desk(case, book, vocabulary)
    _check_systems(desk)
    _check_steps(desk)
    references, recorded = _check_references(desk)
    files = _check_front(desk)
    if not case.of_kind("study") and not case.problems:
        desk.problems.append(Problem("there is no study", "one or more", "add a ```toml study block").at(case.file, 1))
    problems = {(p.line, str(p)): p.at(case.file, p.line or 1) for p in (*case.problems, *desk.problems)}
    ordered = tuple(problems[key] for key in sorted(problems))
    parameters = None if ordered else _parameters(desk, files)
    return CheckedCase(
        case, parameters, tuple(references), tuple(recorded), tuple(desk.uses), ordered, dict(desk.blocks)
    )


def _parameters(desk: _Desk, files: dict[str, str]) -> Checked:
    return {
        "format": 1,
        "systems": desk.systems,
        "studies": desk.studies,
        "workings": desk.workings,
        "steps": desk.steps,
        "files": files,
    }


def _check_systems(desk: _Desk) -> None:
    blocks = desk.case.of_kind("system")
    for block in blocks:
        name = _name_of(block, default="system")
        if name is None:
            desk.note(block, [_bad_name(block)])
            continue
        if len(blocks) > 1 and block.name is None:
            remedy = 'add name = "…" to each'
            desk.note(block, [Problem("a system without a name", "with several systems each has one", remedy)])
        elif name in desk.systems:
            desk.note(block, [_twice("system", name)])
        if block.lines or not _is_broken(desk, block):
            checked, problems = desk.vocabulary.check_system(desk.resolved(block))
            desk.note(block, problems)
            desk.systems.setdefault(name, checked)
    if not blocks and not desk.case.problems:
        remedy = "add a ```toml system block"
        desk.problems.append(Problem("there is no system", "one, or several with names", remedy).at(desk.case.file, 1))


def _is_broken(desk: _Desk, block: Block) -> bool:
    """Return whether the block is no TOML, which the reader has said already."""
    end = block.line + block.source.count("\n") + 1
    return any(block.line <= problem.line <= end for problem in desk.case.problems)


def _name_of(block: Block, default: str) -> str | None:
    name = block.table.get("name", default)
    return name if isinstance(name, str) and NAME.match(name) else None


def _bad_name(block: Block) -> Problem:
    found = f"the name {block.table.get('name')!r}"
    return Problem(found, "letters a to z, digits and _, a letter first", "choose another name", ("name",))


def _twice(what: str, name: str) -> Problem:
    return Problem(
        f'the {what} "{name}" stands twice', f"every {what} has a name of its own", 'add name = "…"', ("name",)
    )


def _check_steps(desk: _Desk) -> None:
    bound: set[str] = set()
    for block in desk.case.blocks:
        if block.kind == "workings":
            names, problems = bound_names(block)
            desk.note(block, problems)
            bound |= names
            desk.steps.append(["workings", len(desk.workings)])
            desk.workings.append(block.source)
            desk.blocks[f"step-{len(desk.steps)}"] = block.line
        elif block.kind == "study" and (block.lines or not _is_broken(desk, block)):
            _check_study(desk, block, bound)


def _check_study(desk: _Desk, block: Block, bound: set[str]) -> None:
    question = block.table.get("question")
    default = question if isinstance(question, str) and NAME.match(question) else "study"
    name = _name_of(block, default=default)
    if name is None or name == "workings":
        desk.note(
            block,
            [
                _bad_name(block)
                if name is None
                else Problem('the name "workings" is taken', "another", "rename it", ("name",))
            ],
        )
        return
    if name in desk.studies:
        desk.note(block, [_twice("study", name)])
    checked, problems = desk.vocabulary.check_study(desk.resolved(block), desk.systems)
    problems += _builder_problems(desk, checked, bound)
    desk.note(block, problems)
    desk.studies.setdefault(name, checked)
    desk.questions.setdefault(name, str(question))
    desk.steps.append(["study", name])
    desk.blocks.setdefault(name, block.line)
    desk.blocks[f"step-{len(desk.steps)}"] = block.line


def _builder_problems(desk: _Desk, checked: Checked | None, bound: set[str]) -> list[Problem]:
    system = desk.systems.get(checked["system"]) if checked else None
    function = system.get("built_by") if system else None
    if function is None or function in bound:
        return []
    remedy = near(function, bound) or f"define {function} in a python workings block above this study"
    found = f'the system is built by "{function}", which no workings block above defines'
    return [Problem(found, "a function of an earlier workings block", remedy)]


def _check_references(desk: _Desk) -> tuple[list[Reference], list[Reference]]:
    promised = {name: desk.vocabulary.quantity_names(question) for name, question in desk.questions.items()}
    kept: dict[str, list[Reference]] = {"reference": [], "recorded": []}
    for block in desk.case.blocks:
        if block.kind in kept:
            references, problems = read_references(block, desk.book, promised)
            desk.note(block, problems)
            seen = {reference.quantity for reference in kept[block.kind]}
            twice = [reference for reference in references if reference.quantity in seen]
            desk.note(block, [_twice("reference value", reference.quantity) for reference in twice])
            kept[block.kind] += references
    return kept["reference"], kept["recorded"]


def _check_front(desk: _Desk) -> dict[str, str]:
    front = desk.case.front
    ids = [case.id for case in desk.book.cases]
    for identity in front.see:
        if identity not in ids:
            remedy = near(identity, ids) or "remove it"
            problem = Problem(f'unknown case "{identity}"', "ids of cases of this book", remedy, ("see",))
            desk.problems.append(problem.at(desk.case.file, front.lines.get("see", 1)))
    files, problems = embedded(front.uses, desk.book)
    desk.problems += [problem.at(desk.case.file, front.lines.get("uses", 1)) for problem in problems]
    return files
