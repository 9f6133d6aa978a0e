"""`luxsift justify` on a board's record: the page on one of its plans."""

from __future__ import annotations

from optimizer.cli.answer import tell_changed
from optimizer.cli.options.justify import JustifyOptions
from optimizer.cli.options.shared import COMMAND_LINE
from optimizer.cli.replace_board import opened_for
from optimizer.cli.steps import steps
from optimizer.errors import Problem

DONE = 0


def justify_board(options: JustifyOptions) -> int:
    """Write the page on a board's plan; raises InputError and OutputError."""
    problems = list(_no_compare(options))
    opened = opened_for(options.record, options.request, [("--output", options.output)], problems)
    from optimizer.record import write_text
    from optimizer.report import page
    from optimizer.report.page.board import compose_board
    from optimizer.review.board_dossier import gather_board
    from optimizer.review.board_dossier import steps as count_steps
    from optimizer.review.dossier import Place

    place = Place(options.record, opened.outline.path.as_posix(), options.output)
    with steps("steps", count_steps(opened, options.rank)) as tell:
        dossier = gather_board(opened, place, options.rank, tell)
    composed = compose_board(dossier)
    write_text(options.output, page.to_markdown(composed) if options.markdown else page.to_html(composed))
    tell_changed(opened.changed)
    return DONE


def _no_compare(options: JustifyOptions) -> list[Problem]:
    """Why parts cannot be answered for on a board's page."""
    rule = "a board's record takes no part to compare with"
    remedy = "luxsift whynot REQUEST PART answers it for the request of a channel"
    return [Problem(COMMAND_LINE, None, "--compare", name, rule, remedy) for name in options.compare]
