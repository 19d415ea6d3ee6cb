"""From a name to the member of its family, with near names for a wrong one; the one place that knows every family."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from typing import Any, Protocol, TypeVar

from bandbook.analyses import ANALYSES, Analysis, Asked
from bandbook.analyses.sketches import sketch_system
from bandbook.errors import AuthorError, PhysicsError, Problem
from bandbook.exhibits import Answer, QuantityName
from bandbook.lattices import LATTICES
from bandbook.model import Model
from bandbook.parameters import NAME, Field, check, corrected, listed, near, nearest, one_of, shortened, shown
from bandbook.systems import COMMON, FORMS, Form

LATTICE_NAMES = tuple(lattice.name for lattice in LATTICES)
FORM_NAMES = tuple(form.name for form in FORMS)
QUESTION_NAMES = tuple(analysis.question for analysis in ANALYSES)

#: Above this many sites a check builds no model: what it would learn is not worth the wait.
MOST_CHECKED_SITES = 20_000

_STUDY = (
    Field("question", "text", "the question"),
    Field("name", "name", "name of the study (default: the question)", default=None),
    Field("system", "name", "system that is asked", default=None),
)
_LATTICE_KEY = (Field("lattice", "text", "name of the lattice"),)


class _Named(Protocol):
    @property
    def name(self) -> str: ...


_Member = TypeVar("_Member", bound=_Named)


def find(name: str, members: Sequence[_Member], what: str) -> _Member:
    """Return the member of a name.

    Raises:
        AuthorError: There is none; near names are offered.

    >>> find("chain", LATTICES, "lattice").dimension
    1
    """
    for member in members:
        if member.name == name:
            return member
    raise AuthorError([one_of(name, [member.name for member in members], what)])


def analysis_of(question: str) -> Analysis:
    """Return the analysis of a question.

    Raises:
        AuthorError: There is none; near names are offered.
    """
    for analysis in ANALYSES:
        if analysis.question == question:
            return analysis
    raise AuthorError([one_of(question, QUESTION_NAMES, "question")])


def quantity_names(question: str) -> tuple[QuantityName, ...]:
    """Return the quantities that a question promises; none for an unknown question."""
    return next((analysis.quantities for analysis in ANALYSES if analysis.question == question), ())


def check_system(given: Mapping[str, Any]) -> tuple[dict[str, Any] | None, list[Problem]]:
    """Check a system block.

    Returns:
        The checked parameters with their ``form``, or ``None`` when something is wrong; and every problem.

    >>> check_system({"lattice": "chian", "beta": -2.5})[1][0].remedy
    'did you mean "chain"?'
    """
    forms = _forms_of(given)
    if len(forms) != 1:
        return None, [_form_problem(given, forms), *_rest_of_system(given, forms)]
    form = forms[0]
    table, wrong = _with_lattice(given) if form.key == "lattice" else (given, [])
    fields = form.fields(table)
    if wrong and table is given:  # nothing is known of the other keys
        table = _only(fields, given)
    checked, problems = check(fields, table)
    problems += [*wrong, *_as_written(form.inspect(checked), corrected(fields, table)[1])]
    if problems:
        return None, list(dict.fromkeys(problems))
    checked.pop("name", None)
    return {"form": form.name, **checked}, []


def _with_lattice(given: Mapping[str, Any]) -> tuple[Mapping[str, Any], list[Problem]]:
    """Return a block with the lattice that it means, and the problem of a misspelt name."""
    name = given["lattice"]
    if name in LATTICE_NAMES:
        return given, []
    if not isinstance(name, str) or not name.strip():
        return given, check(_LATTICE_KEY, {"lattice": name})[1]
    problem = one_of(name, LATTICE_NAMES, "lattice").below("lattice")
    meant = nearest(name, LATTICE_NAMES)
    return ({**given, "lattice": meant[0]} if meant else given), [problem]


def _rest_of_system(given: Mapping[str, Any], forms: Sequence[Form]) -> list[Problem]:
    """Return what else is wrong with a system of no one form: of a misspelt form everything, else the common keys."""
    likely = None if forms else _misspelt(given, [form.key for form in FORMS])
    if likely is None:
        return check(COMMON, _only(COMMON, given))[1]
    key = nearest(likely, [form.key for form in FORMS])[0]
    table = {key if name == likely else name: value for name, value in given.items()}
    return _as_written(check_system(table)[1], {key: likely})


def _misspelt(given: Mapping[str, Any], known: Sequence[str]) -> str | None:
    """Return the first key that is near a known one."""
    return next((key for key in given if nearest(key, known)), None)


def _only(fields: Sequence[Field], given: Mapping[str, Any]) -> dict[str, Any]:
    """Return the keys of a table that fields have."""
    known = {field.name for field in fields}
    return {key: value for key, value in given.items() if key in known}


def _as_written(problems: Sequence[Problem], written: Mapping[str, str]) -> list[Problem]:
    """Return problems at the keys as they stand in the block, misspelt as they are."""
    return [
        replace(problem, key=(written.get(str(problem.key[0]), problem.key[0]), *problem.key[1:]))
        if problem.key
        else problem
        for problem in problems
    ]


def _forms_of(given: Mapping[str, Any]) -> list[Form]:
    """Return the forms whose keys are there; a key that another form has as a field of its own tells nothing.

    The ``sites`` of a ring are a whole number, those of a system written out a list.
    """
    forms = [form for form in FORMS if form.key in given]
    if len(forms) < 2:
        return forms
    fields = {form.key: {field.name for field in form.fields(given)} for form in forms}
    return [
        form
        for form in forms
        if not any(form.key in fields[other.key] for other in forms if other is not form)
        and not (form.key == "sites" and isinstance(given["sites"], int))
    ]


def _form_problem(given: Mapping[str, Any], forms: Sequence[Form]) -> Problem:
    keys = ", ".join(f'"{form.key}" ({form.meaning})' for form in FORMS)
    if forms:
        number = "two" if len(forms) == 2 else "several"
        found = f"a system of {number} forms at once: " + " and ".join(f'"{form.key}"' for form in forms)
        return Problem(found, f"one of {keys}", "keep one of them", (forms[-1].key,))
    if not given:
        return Problem("an empty system", f"one of {keys}", "add one of these keys")
    likely = _misspelt(given, [form.key for form in FORMS])
    if likely is not None:
        remedy = near(likely, [form.key for form in FORMS])
        return Problem(f'unknown key "{shortened(likely)}"', f"a system has one of {keys}", remedy, (likely,))
    return Problem("a system of no known form", f"one of {keys}", f'add "{_likely_key(given)}"')


def _likely_key(given: Mapping[str, Any]) -> str:
    """Return the key of the form whose other keys are there."""
    own = {"sites": {"vectors", "couplings"}, "built_by": {"with"}}
    return next((key for key, names in own.items() if names & set(given)), "lattice")


def check_study(
    given: Mapping[str, Any], systems: Mapping[str, dict[str, Any] | None]
) -> tuple[dict[str, Any] | None, list[Problem]]:
    """Check a study block against the systems of its case.

    Args:
        given: The block.
        systems: Name → checked system; ``None`` for a system with mistakes of its own.

    Returns:
        The checked parameters with ``question`` and ``system``, or ``None``; and every problem.
    """
    system, unknown = _system_of(given, systems)
    table, wrong = _with_question(given)
    analysis = next((one for one in ANALYSES if one.question == table.get("question")), None)
    if analysis is None:  # nothing is known of the other keys
        return None, [*wrong, *check(_STUDY[1:], _only(_STUDY[1:], given))[1], *unknown]
    fields = (*_STUDY, *analysis.fields)
    problems = [*wrong, *check(fields, table)[1], *unknown]
    plain, written = corrected(fields, table)
    checked, unreadable = check(fields, plain)
    checked["system"] = system
    if not unreadable and system is not None:
        problems += _as_written(analysis.inspect(checked, _model_of(systems[system])), written)
    checked.pop("name", None)
    return (None if problems or system is None else checked), problems


def _with_question(given: Mapping[str, Any]) -> tuple[Mapping[str, Any], list[Problem]]:
    """Return a block with the question that it means, and the problem of one that there is not."""
    key = "question" if "question" in given else _misspelt(given, ["question"])
    if key is None or not isinstance(given[key], str):
        return {}, [_question_problem(given)]
    name = given[key]
    problems = [] if key == "question" else [_question_misspelt(key)]
    meant = [name]
    if name not in QUESTION_NAMES:
        problems.append(one_of(name, QUESTION_NAMES, "question").below(key))
        meant = nearest(name, QUESTION_NAMES)
    rest = {name: value for name, value in given.items() if name != key}
    return ({"question": meant[0], **rest} if meant else {}), problems


def _question_misspelt(key: str) -> Problem:
    return Problem(f'unknown key "{shortened(key)}"', "a study has a question", 'did you mean "question"?', (key,))


def _question_problem(given: Mapping[str, Any]) -> Problem:
    allowed = "questions are " + ", ".join(f'"{name}"' for name in QUESTION_NAMES)
    if "question" not in given:
        return Problem('the key "question" is missing', allowed, 'add question = "…"')
    return Problem(f"found {shown(given['question'])}", allowed, "write its name in quotes", ("question",))


def _system_of(
    given: Mapping[str, Any], systems: Mapping[str, dict[str, Any] | None]
) -> tuple[str | None, list[Problem]]:
    name = given.get("system")
    if name is None and len(systems) == 1:
        return next(iter(systems)), []
    if name is None and systems:
        found = f"the case has {len(systems)} systems and the study names none"
        return None, [Problem(found, "systems are " + listed([f'"{key}"' for key in systems]), 'add system = "…"')]
    if name is None or not isinstance(name, str) or not NAME.match(name):
        return None, []
    return (name, []) if name in systems else (None, [one_of(name, list(systems), "system").below("system")])


def _model_of(checked: Mapping[str, Any] | None) -> Model | None:
    """Return the model that a check may look at; ``None`` where workings build it, it is large, or has mistakes."""
    if checked is None or checked["form"] == "built-by":
        return None
    if checked["form"] == "named-lattice" and checked.get("sites", 0) > MOST_CHECKED_SITES:
        return None
    try:
        return build_system(checked, {})
    except (AuthorError, PhysicsError):
        return None


def build_system(checked: Mapping[str, Any], builders: Mapping[str, Callable[..., Any]]) -> Model:
    """Return the Model of a checked system.

    Args:
        checked: The checked parameters with their ``form``.
        builders: The author's functions, for systems built by workings.

    Raises:
        AuthorError: The author's function is missing or returns no Model.
        PhysicsError: The model breaks its own invariants.

    >>> build_system(check_system({"lattice": "chain", "beta": -2.5})[0], {}).dimension
    1
    """
    return find(checked["form"], FORMS, "form").build(checked, builders)


def sketch(name: str, model: Model) -> Answer:
    """Return the sketch of a system, as the answer of the study ``"system"``; empty where it has too many sites."""
    figure = sketch_system(name, model)
    return Answer("system", figures=(figure,) if figure else ())


def answer(study: str, checked: Mapping[str, Any], model: Model) -> Answer:
    """Return what a study gives: compute, then report, tabulate, draw and warn.

    Raises:
        AuthorError: What a check could not see, because only workings build the model.
        PhysicsError: The question makes no sense for the model, or the numbers failed.
    """
    analysis = analysis_of(checked["question"])
    problems = analysis.inspect(checked, model)
    if problems:
        raise AuthorError(problems)
    asked = Asked(study, checked, model)
    result = analysis.compute(asked)
    quantities = tuple(
        quantity if quantity.name.startswith(f"{study}.") else quantity.named(f"{study}.{quantity.name}")
        for quantity in analysis.report(asked, result)
    )
    return Answer(
        study,
        quantities,
        tuple(analysis.tabulate(asked, result)),
        tuple(analysis.draw(asked, result)),
        tuple(analysis.warn(asked, result)),
        result,
    )
