"""What is odd about a job that may still be meant: warnings that ask, while the job goes on.

Each question names the key and its value, says why it is asked, and leaves the answer to the shop. A *questioner*
looks at one matter and returns its question, or an empty text.
"""

from __future__ import annotations

from collections.abc import Callable

from fabricate.job_keys import Job

_SPUN = ("spinning", "shear-spinning")


def _spun_into_a_cavity(job: Job) -> str:
    if job.forming.process != "spinning" or job.forming.contact_face != "convex":
        return ""
    return (
        'forming.contact_face is "convex" with process "spinning": the sheet would be spun into a cavity, '
        "which few lathes can do; is the concave face meant?"
    )


def _reverse_spindle(job: Job) -> str:
    if job.turning is None or job.turning.spindle_direction != "M4":
        return ""
    return (
        'turning.spindle_direction is "M4": a chuck screwed to a threaded spindle nose can unscrew itself under M4; '
        "is it locked against that?"
    )


def _closing_springback(job: Job) -> str:
    springback = job.forming.springback
    for name in ("percent", "depth_loss", "rim_slope_loss_deg"):
        value = getattr(springback, name)
        if value is not None and value < 0.0:
            return f"forming.springback.{name} is {value:g}: the part would close on release; is the sign meant?"
    return ""


def _closing_stations(job: Job) -> str:
    for radius, percent in job.forming.springback.stations or ():
        if percent < 0.0:
            return (
                f"forming.springback.stations has {percent:g} % at radius {radius:g}: "
                "the part would close there on release; is the sign meant?"
            )
    return ""


def _process_of_sheet(job: Job) -> str:
    kind, spun = job.sheet.row.kind, job.forming.process in _SPUN
    if (kind == "plastic") != spun:
        return ""
    return (
        f'forming.process is "{job.forming.process}" and sheet.material "{job.sheet.material}" is a {kind}: '
        f"{'a plastic is rarely spun' if spun else 'a metal is rarely formed that way'}; is the process meant?"
    )


def _thinning_of_stretched_sheet(job: Job) -> str:
    if job.forming.process in _SPUN or job.forming.thinning.law != "none":
        return ""
    return (
        f'forming.thinning.law is "none" with process "{job.forming.process}", which stretches the sheet; '
        "is its thickness after forming known?"
    )


def _thinning_of_another_process(job: Job) -> str:
    if job.forming.thinning.law != "straight-vacuum" or job.forming.process == "straight-vacuum":
        return ""
    return (
        f'forming.thinning.law is "straight-vacuum" with process "{job.forming.process}": '
        "that law is of a sheet drawn into a cavity; is it meant?"
    )


def _limit_word(job: Job) -> str:
    if job.turning is None or job.turning.control.feed_per_rev_word != "G99":
        return ""
    control = job.turning.control
    if control.spindle_limit_word == "G92":
        return (
            'turning.control.spindle_limit_word is "G92" with feed_per_rev_word "G99": '
            "on many such controls G92 cuts a thread; is it meant?"
        )
    if control.units_word in {"G70", "G71"}:
        return (
            f'turning.control.units_word is "{control.units_word}" with feed_per_rev_word "G99": '
            "on many such controls it is a turning cycle; is it meant?"
        )
    return ""


def _wide_block(job: Job) -> str:
    block, rim = job.follow_block, job.reflector.rim_diameter
    if block is None or block.diameter <= 0.5 * rim:
        return ""
    return (
        f"follow_block.diameter is {block.diameter:g} {job.units} and reflector.rim_diameter {rim:g}: more than half "
        "of the part lies under the block, where no roller reaches; is a block that wide meant?"
    )


def _nothing_under_block(job: Job) -> str:
    block, hole, bore = job.follow_block, job.reflector.hole_diameter, job.mould.bore_diameter
    if block is None or block.diameter > max(hole, bore):
        return ""
    key, width = ("reflector.hole_diameter", hole) if hole >= bore else ("mould.bore_diameter", bore)
    return (
        f"follow_block.diameter is {block.diameter:g} {job.units} and {key} {width:g}: there may be nothing under the "
        "block to clamp; is a block that narrow meant?"
    )


def _flat_in_the_face(job: Job) -> str:
    hub, hole = job.mould.hub, job.reflector.hole_diameter
    if hub is None or hub.diameter <= hole:
        return ""
    return (
        f"mould.hub.diameter is {hub.diameter:g} {job.units} and reflector.hole_diameter {hole:g}: the reflecting face "
        "would be flat there and reflect past the focus; is a pad that wide meant?"
    )


def _trim_line_of_no_use(job: Job) -> str:
    if not job.mould.trim_line_depth or job.forming.trim == "on-mould":
        return ""
    return (
        f"mould.trim_line_depth is {job.mould.trim_line_depth:g} {job.units} with forming.trim "
        f'"{job.forming.trim}": the line shows where the rim would be cut on the mould; is it meant?'
    )


def _pilot_through_hole(job: Job) -> str:
    hub, hole = job.mould.hub, job.reflector.hole_diameter
    if hub is None or hub.pilot_diameter <= hole:
        return ""
    return (
        f"mould.hub.pilot_diameter is {hub.pilot_diameter:g} and reflector.hole_diameter {hole:g}: the sheet does not "
        "go over the pilot; is the hole of the blank larger than that of the part?"
    )


_QUESTIONERS: tuple[Callable[[Job], str], ...] = (
    _spun_into_a_cavity,
    _reverse_spindle,
    _closing_springback,
    _closing_stations,
    _process_of_sheet,
    _thinning_of_stretched_sheet,
    _thinning_of_another_process,
    _limit_word,
    _pilot_through_hole,
    _wide_block,
    _nothing_under_block,
    _flat_in_the_face,
    _trim_line_of_no_use,
)


def questions(job: Job) -> tuple[str, ...]:
    """Return what should be asked about a job before it is made.

    Parameters
    ----------
    job : Job
        The job as understood.

    Returns
    -------
    tuple of str
        One sentence each, with key and value; empty where nothing is odd.
    """
    return tuple(question for ask in _QUESTIONERS if (question := ask(job)))
