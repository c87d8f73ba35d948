"""The certificate of a hand-over: one page with the rule, the figures, the readings, and places to sign."""

from __future__ import annotations

from typing import Any

from fieldfit import __version__
from fieldfit.decisions.acceptance import Acceptance
from fieldfit.field.section import Section
from fieldfit.report import words
from fieldfit.report.digits import decimals, fixed, known, litres, percent, plus_minus, significant
from fieldfit.report.explanation_tables import stress_lines
from fieldfit.report.finding import ReachFinding
from fieldfit.report.handover import Handover, ReachVerdict
from fieldfit.report.sheet import Block, Bullets, Heading, Paragraph, Places, Sheet, Table

NAMES = {"c": "Hazen–Williams C", "roughness": "Roughness", "head_loss": "Head loss"}
UNITS = {"c": ("", 1.0), "roughness": ("mm", 1e3), "head_loss": ("m", 1.0)}
VERDICTS = {"pass": "Passed", "fail": "Not passed", "undecided": "Not decidable with these readings"}
RULE_WORDS = {
    "simple acceptance": "Simple acceptance: the measured value itself must keep to the limit, whatever its uncertainty. "
    "Whoever's side the uncertainty falls on carries it.",
    "guarded acceptance": "Guarded acceptance: passed only beyond the acceptance limit, so that a pipe which passes "
    "keeps to the contract but for the agreed risk. Between the two limits it is not accepted as it stands; the "
    "builder carries the doubt.",
    "guarded rejection": "Guarded rejection: not passed only beyond the rejection limit, so that a pipe which fails "
    "misses the contract but for the agreed risk. Between the two limits it is not rejected; the owner carries the "
    "doubt.",
}


def certificate(handover: Handover) -> Sheet:
    """Return the certificate as a sheet.

    Parameters
    ----------
    handover : Handover
        What was found.

    Returns
    -------
    Sheet
        To be printed as HTML or PDF.
    """
    finding, section = handover.finding, handover.finding.section
    campaign = finding.campaigns[-1]
    date = f"{campaign.date.day} {campaign.date:%B %Y}" if campaign.date else campaign.log.file
    blocks: list[Block] = [Paragraph(text=VERDICTS[handover.outcome], kind="verdict")]
    for verdict in handover.verdicts:
        blocks += _reach(section, verdict, len(handover.verdicts) > 1)
    blocks += [
        Heading(text="Instruments and pipe"),
        Table(head=(), rows=_instruments(section), widths=(0.28, 0.72)),
        Paragraph(
            text="This is a calculation from the readings of one day. It does not decide by itself: the engineer in charge "
            "of the contract does, under local codes and the authority having jurisdiction.",
            kind="note",
        ),
        Places(labels=("For the builder: name, date", "For the owner: name, date", "Engineer in charge: name, date")),
    ]
    return Sheet(
        title=f"Acceptance test: {section.name}",
        subtitle=f"{section.material or 'material unknown'}, tested {date}",
        blocks=tuple(blocks),
        footer=f"fieldfit {__version__} · log {campaign.log.file}, SHA-256 {campaign.log.sha256}",
    )


def verdict_words(acceptance: Acceptance) -> str:
    """Return the verdict on one reach in a sentence or two."""
    subject = acceptance.contract.subject
    side = "not below" if subject == "c" else "not above"
    value, band, asked = _value(acceptance, acceptance.value), _band(acceptance), acceptance.contract.limit
    told = {
        "pass": "It is accepted.",
        "fail": "It is not accepted.",
        "undecided": f"Neither side of the limit is proven at the agreed risk of {percent(acceptance.risk)}.",
    }[acceptance.outcome]
    return (
        f"{NAMES[subject]} is {value} ({band}, 95 %) at {litres(acceptance.flow_m3_s)} and "
        f"{fixed(acceptance.temperature_degc, 0)} °C; the contract asks for {side} {_value(acceptance, asked)}. "
        f"The probability that the pipe keeps to it is {percent(acceptance.conformance_probability)}. {told}"
    )


def handover_summary(handover: Handover) -> str:
    """Return the verdict for the terminal, about a dozen lines."""
    from fieldfit.report.summary import folded

    lines = [f"{handover.finding.section.name}: {VERDICTS[handover.outcome].lower()}"]
    for verdict in handover.verdicts:
        found = verdict.acceptance
        if len(handover.verdicts) > 1:
            lines.append(f"  {verdict.reach.readings.upstream.column} to {verdict.reach.readings.downstream.column}")
        if found is None:
            lines += folded("why", f"{words.sentence(verdict.reach.wall.because)} {verdict.reach.wall.advice}")
            continue
        lines += folded("measured", verdict_words(found))
        lines += folded("rule", f"{found.contract.rule}, risk {percent(found.risk)}")
        lines += folded("passes", f"{_from(found)} {_value(found, found.acceptance_limit)}")
        lines += folded("fails", f"{_beyond(found)} {_value(found, found.rejection_limit)}")
        if found.extra:
            lines += folded("would decide", f"{found.extra[0].what} Chance {percent(found.extra[0].chance)}.")
    return "\n".join(lines)


def acceptance_record(acceptance: Acceptance | None) -> dict[str, Any] | None:
    """Return a verdict as plain data, units in the keys."""
    if acceptance is None:
        return None
    unit, scale = UNITS[acceptance.contract.subject]
    key = f"_{unit}" if unit else ""
    risks = acceptance.global_risks
    return {
        "of": acceptance.contract.subject,
        f"limit{key}": acceptance.contract.limit * scale,
        f"value{key}": acceptance.value * scale,
        f"band{key}": [end * scale for end in acceptance.band],
        "outcome": acceptance.outcome,
        "rule": acceptance.contract.rule,
        "risk": acceptance.risk,
        f"acceptance_limit{key}": acceptance.acceptance_limit * scale,
        f"rejection_limit{key}": acceptance.rejection_limit * scale,
        "conformance_probability": acceptance.conformance_probability,
        "consumers_risk": risks.consumer if risks else None,
        "producers_risk": risks.producer if risks else None,
        "built": acceptance.built or None,
        "flow_m3_s": acceptance.flow_m3_s,
        "temperature_degc": acceptance.temperature_degc,
        "bore_m": acceptance.bore_m,
        "true_bore_c": acceptance.other_bore_c,
        "decades_outside": acceptance.decades_outside,
        "errors_in_band": acceptance.band_why,
        "would_decide": [{"what": one.what, "chance": one.chance} for one in acceptance.extra],
    }


def _reach(section: Section, verdict: ReachVerdict, several: bool) -> list[Block]:
    """Return the blocks on one reach."""
    reach, found = verdict.reach, verdict.acceptance
    name = f"{reach.readings.upstream.column} to {reach.readings.downstream.column}"
    blocks: list[Block] = [Heading(text=f"Verdict, {name}")] if several else []
    if found is None:
        return [*blocks, Paragraph(text=f"{words.sentence(reach.wall.because)} {reach.wall.advice}")]
    blocks += [
        Paragraph(text=verdict_words(found)),
        Table(head=(), rows=_figures(found), widths=(0.28, 0.72)),
        Paragraph(text=RULE_WORDS[found.contract.rule], kind="note"),
    ]
    if found.extra:
        rows = tuple((one.what, percent(one.chance)) for one in found.extra[:3])
        blocks += [
            Table(head=("What would help to decide", "chance that it decides"), rows=rows, widths=(0.78, 0.22)),
        ]
    if verdict.stress:
        blocks += [
            Heading(text="How wrong an input would have to be to change the verdict"),
            Bullets(items=stress_lines(verdict.stress)),
        ]
    return [*blocks, Heading(text="Readings"), _readings(reach)]


def _figures(found: Acceptance) -> tuple[tuple[str, str], ...]:
    """Return the figures of the verdict by name."""
    contract = found.contract
    rows = [
        ("Asked", f"{NAMES[contract.subject]} of at {_most(found)} {_value(found, contract.limit)}"),
        ("Reduced to", _basis(found)),
        ("Measured", f"{_value(found, found.value)} ({_band(found)}, 95 %); the range holds {found.band_why}"),
        ("Passes", f"{_from(found)} {_value(found, found.acceptance_limit)}"),
        ("Fails", f"{_beyond(found)} {_value(found, found.rejection_limit)}"),
        ("Keeps to the contract", f"with probability {percent(found.conformance_probability)}"),
    ]
    if found.other_bore_c is not None and contract.bore_m is not None:
        rows.insert(
            3,
            (
                "By the true bore",
                f"C is {fixed(found.other_bore_c, 1)}; the bore by convention makes a difference of "
                f"{fixed(found.value - found.other_bore_c, 1)}",
            ),
        )
    if found.global_risks:
        rows.append(
            (
                "Risks over many",
                f"owner accepts a pipe that does not conform: {percent(found.global_risks.consumer)}; builder has one "
                f"refused or put off that does: {percent(found.global_risks.producer)} ({found.built})",
            )
        )
    return tuple(rows)


def _basis(found: Acceptance) -> str:
    """Return the contract's basis in words."""
    bore = "by convention" if found.contract.bore_m is not None else "as laid"
    fittings = "fittings counted" if found.contract.fittings else "fittings taken off"
    where = (
        f", {fixed(found.decades_outside, 2)} decades of Reynolds number outside the test"
        if found.decades_outside
        else ""
    )
    return (
        f"{litres(found.flow_m3_s)}{where}, {fixed(found.temperature_degc, 0)} °C, bore {significant(found.bore_m * 1e3, 4)} mm "
        f"{bore}, {fittings}"
    )


def _most(found: Acceptance) -> str:
    """Return which way the contract limits."""
    return "least" if found.contract.subject == "c" else "most"


def _from(found: Acceptance) -> str:
    """Return on which side of a limit the contract is kept."""
    return "from" if found.contract.subject == "c" else "up to"


def _beyond(found: Acceptance) -> str:
    """Return on which side of a limit the contract is missed."""
    return "below" if found.contract.subject == "c" else "above"


def _value(found: Acceptance, value: float) -> str:
    """Return a value with its unit, to the digits the band deserves."""
    unit, scale = UNITS[found.contract.subject]
    half = max(0.5 * (found.band[1] - found.band[0]) * scale, 1e-9)
    text = fixed(value * scale, decimals(half))
    return f"{text} {unit}" if unit else text


def _band(found: Acceptance) -> str:
    """Return the band in words."""
    low, high = found.band
    unit, _ = UNITS[found.contract.subject]
    return f"{_value(found, low).removesuffix(unit).strip()} to {_value(found, high)}"


def _readings(reach: ReachFinding) -> Table:
    """Return the plateaus as a table."""
    values = reach.wall.plateaus
    if values is None:
        return Table(head=(), rows=(("No plateau was used.",),), widths=(1.0,))
    rows = tuple(
        (
            str(int(number)),
            significant(flow * 1e3),
            plus_minus(head, standard),
            plus_minus(c, c * relative),
        )
        for number, flow, head, standard, c, relative in zip(
            values.number,
            values.flow_m3_s,
            values.friction_loss_m,
            values.friction_loss_standard_m,
            values.hazen_williams_c,
            values.hazen_williams_relative,
            strict=True,
        )
    )
    head = ("plateau", "flow [L/s]", "head loss to friction [m], ± 95 %", "C by the bore as laid [–], ± 95 %")
    return Table(head=head, rows=rows, widths=(0.13, 0.17, 0.35, 0.35))


def _instruments(section: Section) -> tuple[tuple[str, str], ...]:
    """Return what the test was made with."""
    meter = section.meter
    rows = [("Flow meter", f"{meter.serial or meter.column}: {meter.accuracy.text}")]
    rows += [
        (f"Gauge at {known(tap.station)} m", f"{tap.gauge or tap.column}: {tap.accuracy.text}") for tap in section.taps
    ]
    return (*rows, ("Bore", f"{known(section.bore, 1e3)} mm, {section.bore_source}"))
