"""References to parameter sets: a value keeps its unit until a field has asked for it."""

from bandbook.cases.resolve import resolve
from bandbook.cases.sets import ParameterSet, ParameterValue
from bandbook.parameters import Field, check


def test_a_value_keeps_its_unit() -> None:
    (found, _, _) = resolve(
        "@one.length",
        {"one": ParameterSet("one", "one.toml", values={"length": ParameterValue(2.4, unit="Å")})},
        key=("beta",),
    )
    checked, problems = check((Field("beta", "number", "resonance integral", "eV"),), {"beta": found})
    assert checked["beta"] is None
    assert str(problems[0]) == 'beta: "@one.length" is 2.4 Å; allowed is a finite number in eV; name a value in eV'
    checked, problems = check((Field("period", "number", "repeat", "Å"),), {"period": found})
    assert (type(checked["period"]), checked, problems) == (float, {"period": 2.4}, [])
