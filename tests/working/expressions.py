"""Random formulas for the tests: every operator, every kind of nesting."""

from collections.abc import Iterable

from hypothesis import strategies as st

NAMES = {
    "a": 3.7,
    "b_ef": -1.234567891,
    "EI": 4.697123456e7,
    "sigma_mean": 0.000123456,
    "h_f": 70.0,
    "n": 2.0,
    "x": 0.1,
}


def expressions() -> st.SearchStrategy[str]:
    leaves = st.sampled_from([*NAMES, "2", "0.8", "pi", "12.5"])

    def grow(inner: st.SearchStrategy[str]) -> st.SearchStrategy[str]:
        pair = st.tuples(inner, inner)
        return st.one_of(
            *(pair.map(lambda p, o=operator: f"({p[0]}) {o} ({p[1]})") for operator in ("+", "-", "*", "/")),
            st.tuples(inner, st.sampled_from(["2", "3", "n", "-1", "(n + 1)"])).map(lambda p: f"({p[0]}) ** {p[1]}"),
            inner.map(lambda p: f"-({p})"),
            inner.map(lambda p: f"sqrt(abs({p}))"),
            pair.map(lambda p: f"max({p[0]}, {p[1]})"),
        )

    return st.recursive(leaves, grow, max_leaves=9)


def values_for(names: Iterable[str]) -> dict[str, float]:
    return {name: NAMES[name] for name in names}
