"""How a quantity's name is shown: ``sigma_mean`` is a Greek letter with an upright subscript."""

from __future__ import annotations

from functools import lru_cache

GREEK = {
    "alpha": "α",
    "beta": "β",
    "gamma": "γ",
    "delta": "δ",
    "epsilon": "ε",
    "zeta": "ζ",
    "eta": "η",
    "theta": "θ",
    "kappa": "κ",
    "lamda": "λ",  # the other spelling is a word of the language the formulas are written in
    "mu": "μ",
    "nu": "ν",
    "xi": "ξ",
    "pi": "π",
    "rho": "ρ",
    "sigma": "σ",
    "tau": "τ",
    "phi": "φ",
    "chi": "χ",
    "psi": "ψ",
    "omega": "ω",
    "Gamma": "Γ",
    "Delta": "Δ",
    "Theta": "Θ",
    "Lamda": "Λ",
    "Sigma": "Σ",
    "Phi": "Φ",
    "Psi": "Ψ",
    "Omega": "Ω",
}


@lru_cache(maxsize=4096)
def split(name: str) -> tuple[str, str]:
    """A name as base and subscript: ``f_v_k`` is ('f', 'v,k'), ``gamma_M`` is ('γ', 'M'), ``EI`` is ('EI', '')."""
    base, *rest = name.split("_")
    return GREEK.get(base, base), ",".join(GREEK.get(each, each) for each in rest if each)


def plain(name: str, index: str = "") -> str:
    """A name in one line of plain characters: ``σ_mean``, ``E_i``, ``A_w,i``."""
    base, below = split(name)
    below = ",".join(each for each in (below, index) if each)
    return f"{base}_{below}" if below else base
