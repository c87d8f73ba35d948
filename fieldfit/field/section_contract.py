"""What a contract asks of a new pipe: the `[contract]` table."""

from __future__ import annotations

from fieldfit.errors import InputError, near_miss
from fieldfit.field.contract import Contract, Subject
from fieldfit.field.quantities import quantity, uncertain
from fieldfit.field.toml_table import TomlTable
from fieldfit.field.uncertain import Uncertain
from fieldfit.field.units import shown

SUBJECTS: tuple[Subject, ...] = ("c", "roughness", "head_loss")
RULES = ("simple acceptance", "guarded acceptance", "guarded rejection")
FITTINGS = ("in", "out")


def read_contract(table: TomlTable | None) -> Contract | None:
    """Return what the contract asks, or None where the file has no such table.

    Parameters
    ----------
    table : TomlTable or None
        The `[contract]` table.

    Raises
    ------
    InputError
        When the limit, its basis, the rule or its risk is missing or wrong.
    """
    if table is None:
        return None
    subject, limit = _limit(table)
    flow = table.text("flow")
    if subject == "head_loss" and flow is None:
        advice = 'Write flow = "25 L/s", the flow the contract names.'
        raise InputError("a limit on head loss means nothing without its flow", advice).at(table.where("head_loss"))
    rule = _choice(table, "rule", RULES, None)
    bore, temperature = table.text("bore"), table.text("temperature")
    with table.at("flow"):
        flow_m3_s = _positive(quantity(flow, "flow", "25 L/s"), flow) if flow else None
    with table.at("bore"):
        bore_m = _positive(quantity(bore, "length", "200 mm"), bore) if bore else None
    with table.at("temperature"):
        temperature_degc = quantity(temperature, "temperature", "15 degC") if temperature else None
    return Contract(
        subject=subject,
        limit=limit,
        flow_m3_s=flow_m3_s,
        temperature_degc=temperature_degc,
        bore_m=bore_m,
        fittings=_choice(table, "fittings", FITTINGS, "in" if subject == "head_loss" else "out") == "in",
        rule=rule,
        risk=_risk(table, rule),
        built=_built(table, subject),
    )


def _limit(table: TomlTable) -> tuple[Subject, float]:
    """Return what is limited and how."""
    given = [subject for subject in SUBJECTS if subject in table.values]
    if len(given) != 1:
        seen = "no limit is given" if not given else f"{' and '.join(given)} are limited at once"
        raise InputError(seen, 'Write one of c = 130, roughness = "0.1 mm" or head_loss = "4.2 m".').at(
            table.where(given[-1] if given else "rule")
        )
    subject = given[0]
    text = table.number_or_text(subject) or ""
    with table.at(subject):
        if subject == "c":
            value = quantity(text, "ratio", "130")
        else:
            value = quantity(text, "length", "0.1 mm" if subject == "roughness" else "4.2 m")
        return subject, _positive(value, text)


def _positive(value: float, text: str) -> float:
    """Return a value that must be above zero."""
    if value <= 0.0:
        raise InputError(f"'{shown(text)}' is not positive", "Write what the contract names.")
    return value


def _choice(table: TomlTable, key: str, allowed: tuple[str, ...], usual: str | None) -> str:
    """Return one of a few words."""
    text = table.text(key) if usual is not None else table.needed(key)
    if text is None and usual is not None:
        return usual
    if text is None or text.casefold() not in allowed:
        listed = ", ".join(f'"{word}"' for word in allowed)
        advice = f"{near_miss(text or '', allowed)}Write one of {listed}."
        raise InputError(f"'{shown(text or '')}' is no {key} that fieldfit knows", advice).at(table.where(key))
    return text.casefold()


def _risk(table: TomlTable, rule: str) -> float | None:
    """Return the agreed risk, which every rule but simple acceptance needs."""
    text = table.number_or_text("risk")
    if text is None:
        if rule == "simple acceptance":
            return None
        advice = 'Write risk = "5 %", as agreed, or rule = "simple acceptance".'
        raise InputError(f"the rule '{rule}' has no risk", advice).at(table.where("rule"))
    with table.at("risk"):
        risk = quantity(text, "ratio", "5 %")
        if not 0.0001 <= risk <= 0.5:
            raise InputError(f"a risk of '{shown(text)}' makes no rule", "Keep between 0.01 % and 50 %.")
        return risk


def _built(table: TomlTable, subject: Subject) -> Uncertain | None:
    """Return what is usually built."""
    text = table.number_or_text("built")
    if text is None:
        return None
    examples = {"c": "145 ± 8", "roughness": "0.05 mm ± 50 %", "head_loss": "3.5 m ± 15 %"}
    with table.at("built"):
        return uncertain(text, "ratio" if subject == "c" else "length", examples[subject], "10 %")
