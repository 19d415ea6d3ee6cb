"""From a Case to checked parameters, all of its author's mistakes at once; nothing is executed."""

from collections.abc import Collection, Mapping
from dataclasses import dataclass, field, replace
from typing import Any, Final, Protocol

from bandbook.cases.book import Book
from bandbook.cases.embed import embedded
from bandbook.cases.fences import Block, Prose
from bandbook.cases.measured import with_series
from bandbook.cases.read import ID, Case
from bandbook.cases.references import Promised, QuantityPattern, Reference, read_references
from bandbook.cases.resolve import ParameterUse, resolve
from bandbook.cases.toml_lines import Key
from bandbook.cases.workings import ANY, bound_names
from bandbook.errors import Problem
from bandbook.parameters import NAME, near, shortened

Checked = dict[str, Any]
#: Names that no study may have, and who has them.
TAKEN: Final = {"workings": "quantities of workings have it", "system": "sketches of systems have it"}


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

    def formula_mistakes(self, text: str) -> list[tuple[int, str]]:
        """Return the formulas of a text that cannot be set: line in the text, from 1, and what was found."""
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
        blocks: Study, ``system`` and its name, or ``step-n`` of a workings block → line of its fence.
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
    """What is gathered while a case is checked.

    Attributes:
        builders: Name bound by a workings block → line of the block that binds it first.
        unnamed: Studies whose name is not known, because their block is wrong.
    """

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
    builders: dict[str, int] = field(default_factory=dict)
    unnamed: int = 0

    def note(self, block: Block, *problems: Problem) -> None:
        """Place problems of a block at their lines."""
        self.problems += [
            problem if problem.line else problem.at(self.case.file, block.line_of(problem.key)) for problem in problems
        ]

    def resolved(self, block: Block) -> tuple[dict[str, Any], set[Key]]:
        """Return the block's table with references to parameter sets replaced, and the keys where that failed."""
        table, uses, problems = resolve(dict(block.table), self.book.sets, block=block.line)
        self.uses += uses
        self.note(block, *problems)
        return dict(table), {problem.key for problem in problems}

    def kept(self, block: Block, result: tuple[Checked | None, list[Problem]], failed: set[Key]) -> Checked | None:
        """Note the problems of a checked block that do not follow from a failed reference; return what is usable."""
        checked, problems = result
        own = [problem for problem in problems if problem.key not in failed]
        self.note(block, *own)
        return None if own or failed else checked


def check_case(case: Case, book: Book, vocabulary: Vocabulary) -> CheckedCase:
    """Check a case: systems, then studies and workings in file order, then reference values and front matter."""
    desk = _Desk(case, book, vocabulary)
    _check_workings(desk)
    _check_systems(desk)
    _check_steps(desk)
    references = _check_references(desk, "reference")
    recorded = _check_references(desk, "recorded")
    files = _check_front(desk)
    _check_prose(desk)
    _check_presence(desk)
    problems = {(p.line, str(p)): p.at(p.file or case.file, p.line or 1) for p in (*case.problems, *desk.problems)}
    ordered = tuple(problems[key] for key in sorted(problems))
    parameters = None if ordered else _parameters(desk, files)
    return CheckedCase(case, parameters, references, recorded, tuple(desk.uses), ordered, dict(desk.blocks))


def _parameters(desk: _Desk, files: dict[str, str]) -> Checked:
    return {
        "format": 1,
        "systems": desk.systems,
        "studies": desk.studies,
        "workings": desk.workings,
        "steps": desk.steps,
        "files": files,
    }


def _check_prose(desk: _Desk) -> None:
    """Note the formulas that cannot be set."""
    for part in desk.case.parts:
        if isinstance(part, Prose):
            for line, found in desk.vocabulary.formula_mistakes(part.text):
                remedy = "correct it, or write \\$ for a dollar sign"
                problem = Problem(found, "a formula between dollar signs, in LaTeX", remedy)
                desk.problems.append(problem.at(desk.case.file, part.line + line - 1))


def _check_presence(desk: _Desk) -> None:
    """Note a missing system or study, unless the file could not be read as a case at all."""
    if not desk.case.parts and desk.case.problems:
        return
    for kind, what in (("system", "one, or several with names"), ("study", "one or more")):
        if not desk.case.of_kind(kind):
            problem = Problem(f"there is no {kind}", what, f"add a ```toml {kind} block")
            desk.problems.append(problem.at(desk.case.file, 1))


def _check_workings(desk: _Desk) -> None:
    """Note the mistakes of workings and the names they bind."""
    for block in desk.case.of_kind("workings"):
        names, problems = ({ANY}, []) if block.is_broken else bound_names(block)
        desk.note(block, *problems)
        for name in {ANY} if problems else names:
            desk.builders.setdefault(name, block.line)


def _check_systems(desk: _Desk) -> None:
    blocks = desk.case.of_kind("system")
    for block in blocks:
        name = _name_of(block, "system")
        if len(blocks) > 1 and "name" not in block.table and not block.is_broken:
            remedy = 'add name = "…" to each'
            desk.note(block, Problem("a system without a name", "with several systems each has one", remedy))
        elif name in desk.systems:
            desk.note(block, _twice("system", name))
        checked = None
        if not block.is_broken:
            table, failed = desk.resolved(block)
            checked = desk.kept(block, desk.vocabulary.check_system(table), failed)
            _check_builder(desk, block, checked)
        desk.systems.setdefault(name, checked)
        desk.blocks.setdefault(f"system {name}", block.line)


def _check_builder(desk: _Desk, block: Block, checked: Checked | None) -> None:
    """Note a function that no workings block of the case binds."""
    function = checked.get("built_by") if checked else None
    if function is None or function in desk.builders or ANY in desk.builders:
        return
    remedy = near(function, desk.builders) or f"define {function} in a python workings block above the first study"
    desk.note(
        block,
        Problem(f'no workings block defines "{function}"', "a function of a workings block", remedy, ("built_by",)),
    )


def _name_of(block: Block, default: str) -> str:
    """Return the name that a block has; of a wrong one its default, and its own check says what is wrong."""
    name = block.table.get("name", default)
    return name if isinstance(name, str) and NAME.match(name) else default


def _twice(what: str, name: str) -> Problem:
    return Problem(
        f'the {what} "{name}" stands twice', f"every {what} has a name of its own", 'add name = "…"', ("name",)
    )


def _check_steps(desk: _Desk) -> None:
    for block in desk.case.blocks:
        if block.kind == "workings":
            desk.steps.append(["workings", len(desk.workings)])
            desk.workings.append(block.source)
            desk.blocks[f"step-{len(desk.steps)}"] = block.line
        elif block.kind == "study":
            _check_study(desk, block)


def _check_study(desk: _Desk, block: Block) -> None:
    question = block.table.get("question")
    default = question if isinstance(question, str) and NAME.match(question) else ""
    name = _name_of(block, default)
    is_known = not block.is_broken and bool(desk.vocabulary.quantity_names(default))
    if not name or ("name" not in block.table and not is_known):
        desk.unnamed += 1
    if name in TAKEN:
        desk.note(block, Problem(f'the name "{name}" is taken', TAKEN[name], "choose another name", ("name",)))
    elif name and name in desk.studies:
        desk.note(block, _twice("study", name))
    checked = None
    if not block.is_broken:
        table, failed = desk.resolved(block)
        table, wrong = with_series(table, desk.book.content)
        desk.note(block, *wrong)
        checked = desk.kept(block, desk.vocabulary.check_study(table, desk.systems), failed)
        _check_order(desk, block, checked)
    desk.studies.setdefault(name, checked)
    desk.questions.setdefault(name, "" if block.is_broken else str(question))
    desk.steps.append(["study", name])
    desk.blocks.setdefault(name, block.line)
    desk.blocks[f"step-{len(desk.steps)}"] = block.line


def _check_order(desk: _Desk, block: Block, checked: Checked | None) -> None:
    """Note a study that stands above the workings that build its system."""
    system = desk.systems.get(checked["system"]) if checked else None
    function = system.get("built_by") if system else None
    line = min((desk.builders[name] for name in (function, ANY) if name in desk.builders), default=0)
    if function is not None and line > block.line:
        found = f'its system is built by "{function}", which is defined only in line {line}'
        desk.note(
            block, Problem(found, "a function of an earlier workings block", "move the workings above this study")
        )


def _check_references(desk: _Desk, kind: str) -> tuple[Reference, ...]:
    studies = {name: desk.vocabulary.quantity_names(question) for name, question in desk.questions.items() if name}
    promised = Promised(studies, bool(desk.case.of_kind("workings")), desk.unnamed == 0)
    kept: dict[str, Reference] = {}
    for block in desk.case.of_kind(kind):
        if block.is_broken:
            continue
        table, failed = desk.resolved(block)
        references, problems = read_references(table, kind, book=desk.book, promised=promised)
        desk.note(block, *(problem for problem in problems if problem.key not in failed))
        for key, reference in references:
            if reference.quantity in kept:
                found = f'the quantity "{reference.quantity}" has a {kind} value already'
                desk.note(block, Problem(found, "one value each", "remove one of the two", key))
            kept.setdefault(reference.quantity, replace(reference, line=block.line_of(key)))
    return tuple(kept.values())


def _check_front(desk: _Desk) -> dict[str, str]:
    front = desk.case.front
    ids = [case.id for case in desk.book.cases]
    problems = []
    for row, identity in enumerate(front.see):
        if identity not in ids:
            remedy = near(identity, ids) or "remove it"
            problems.append(
                Problem(f'unknown case "{shortened(identity)}"', "ids of cases of this book", remedy, ("see", row))
            )
    for row, identity in enumerate(front.was):
        if not ID.match(identity):
            allowed = "small letters a to z, digits, points and hyphens, / between folders"
            problems.append(Problem(f'"{shortened(identity)}" is no id', allowed, "write the former id", ("was", row)))
    files, wrong = embedded(front.uses, desk.book)
    for problem in (*problems, *wrong):
        name, number = problem.key[:2]
        line = front.line_of(str(name), number if isinstance(number, int) else -1)
        desk.problems.append(problem.at(desk.case.file, line))
    return files
