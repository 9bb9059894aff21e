"""How far a cloud of samples would have reached, so that nobody takes a cloud for the answer."""

from fits.reports import numbers
from fits.reports.features.document import Features, Kind
from fits.reports.snapshot import Document
from fits.reports.words import listing

# Drawn curves that reach further than this are not worth a warning.
NEARLY_ALL = 0.95


def sampling_sentence(features: Features) -> str:
    """Share of the exact range of each peak's height that samples reach; empty where none were drawn."""
    drawn = [(peak.name, samples) for peak in features.found(Kind.PEAK) if (samples := _known(peak.samples))]
    if not drawn:
        return ""
    _, first = drawn[0]
    count = f"{int(first['count']):,}".replace(",", "\u202f")
    level = numbers.percent(float(first["level"]))
    shares = listing([_share(name, samples) for name, samples in drawn])
    if max(float(samples["share"]) for _, samples in drawn) > NEARLY_ALL:
        return f"{count} curves drawn from the {level} ball reach {shares}; the ranges given here are the exact ones."
    return f"{count} curves drawn from the {level} ball reach only {shares}; a cloud of samples is not the answer."


def _known(samples: Document | None) -> Document | None:
    """None as well where the exact range could not be solved."""
    return samples if samples is not None and samples["share"] is not None else None


def _share(name: str, samples: Document) -> str:
    low, high = (numbers.significant(float(end)) for end in samples["sampled"])
    exact = numbers.interval(*map(float, samples["exact"]))
    share = f"{100.0 * float(samples['share']):.0f} %"
    return f"{share} of the exact range of height of {name} ({low} to {high} of {exact})"
