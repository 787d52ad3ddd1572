"""Commands of who works with what: people, and instruments."""

from __future__ import annotations

from datetime import date

import click

from sheets.cli.common import AS_JSON, REGISTER, day, leave, now, show, today, wrong


@click.command()
@click.argument("name", metavar="NAME", required=False)
@REGISTER
@click.option("--on", metavar="DATE", help="As of this day, year first; of a training, its day. Else today.")
@click.option("--may", default="", metavar="WHAT", help="Ask: was the person authorised for this that day?")
@click.option("--authorise", metavar="WHAT", help="The employer authorises the person for this.")
@click.option("--since", metavar="DATE", help="First day of an authorisation; today without it.")
@click.option("--until", metavar="DATE", help="Last day of an authorisation or training, if it has one.")
@click.option("--end", metavar="WHAT", help="The authorisation for this ends; needs --reason.")
@click.option("--last", metavar="DATE", help="Last day on which it counts; today without it.")
@click.option("--trained", metavar="WHAT", help="The person was trained in this, on the day of --on.")
@click.option("--by", default="", metavar="NAME", help="Who says so for the employer.")
@click.option("--reason", default="", metavar="TEXT", help="Why an authorisation ends.")
@AS_JSON
def people(
    name: str | None,
    register_at: str,
    on: str | None,
    may: str,
    authorise: str | None,
    since: str | None,
    until: str | None,
    end: str | None,
    last: str | None,
    trained: str | None,
    by: str,
    reason: str,
    as_json: bool,
) -> None:
    """Show who is authorised and trained as of any day; tell of an authorisation, its end, or a training.

    \b
    Example: jamnut people "Ada Quarrow" --register demonstration/register.db \\
        --authorise lockout --since 2026-01-12 --by "Edda Fenn"
    """
    from sheets import pipeline

    telling = [one for one in (authorise, end, trained) if one is not None]
    if len(telling) > 1 or (telling and may):
        raise wrong("options", "One thing at a time is told or asked.", "Give the command once for each.")
    if telling and (name is None or not by):
        raise wrong("--by", "Who it is about, and who says so, must be named.", "Give NAME and --by.")
    if telling and name is not None:
        if authorise is not None:
            number = pipeline.authorise(
                register_at,
                name=name,
                what=authorise,
                since=day("--since", since),
                until=_last_day(until),
                by=by,
                when=now(),
            )
        elif end is not None:
            number = pipeline.end_authorisation(
                register_at, name=name, what=end, last=day("--last", last), why=reason, by=by, when=now()
            )
        else:
            number = pipeline.train(
                register_at,
                name=name,
                what=telling[0],
                on=day("--on", on),
                until=_last_day(until),
                by=by,
                today=today(),
                when=now(),
            )
        show([f"event {number}"])
        return
    found = pipeline.people(register_at, on=day("--on", on), name=name, may=may)
    show(pipeline.people_json(found) if as_json else pipeline.people_text(found))
    leave(found.status)


def _last_day(until: str | None) -> date | None:
    return None if until is None else day("--until", until)


@click.command()
@click.argument("gauge", metavar="GAUGE", required=False)
@REGISTER
@click.option("--on", metavar="DATE", help="Day that due dates are held against, or that it was found bad.")
@click.option("--certificate", metavar="NUMBER", help="List GAUGE, by its serial number, with this one.")
@click.option("--due", metavar="DATE", help="Last day on which it may be used.")
@click.option("--range", "range_text", metavar="AMOUNT", help="End of its range, with unit: '400 bar'.")
@click.option("--class", "accuracy_class", default="", metavar="FIGURE", help="Class, per cent of its range.")
@click.option("--error", default="", metavar="AMOUNT", help="Largest error, with unit, of one without class.")
@click.option("--number", default="", metavar="TEXT", help="The works' own number of it, such as 17.")
@click.option("--what", default="dial gauge", show_default=True, metavar="TEXT", help="What it is.")
@click.option("--bad", metavar="TEXT", help="GAUGE was found to read wrongly: how. Lists what hangs on it.")
@click.option("--good", "good_until", metavar="DATE", help="Last day on which it was known to read rightly.")
@click.option("--by", default="", metavar="NAME", help="Who says so.")
@AS_JSON
def instruments(
    gauge: str | None,
    register_at: str,
    on: str | None,
    certificate: str | None,
    due: str | None,
    range_text: str | None,
    accuracy_class: str,
    error: str,
    number: str,
    what: str,
    bad: str | None,
    good_until: str | None,
    by: str,
    as_json: bool,
) -> None:
    """Show gauges, or one with everything read with it; list one with a certificate, or as found bad.

    \b
    Example: jamnut instruments BT-4471 --register demonstration/register.db --number 17 \\
        --range "400 bar" --class 1.0 --certificate C-2209 --due 2027-05-31 --by "Ada Quarrow"
    """
    from sheets import pipeline

    if certificate is not None and bad is not None:
        raise wrong("--bad", "It is listed or found bad, not both.", "Give the command once for each.")
    if certificate is not None:
        if gauge is None or due is None or range_text is None or not by:
            raise wrong(
                "--certificate",
                "Something of the certificate isn't given.",
                "Give GAUGE, --due, --range, --class or --error, and --by.",
            )
        event = pipeline.list_gauge(
            register_at,
            serial=gauge,
            number=number,
            what=what,
            range_text=range_text,
            accuracy_class=accuracy_class,
            error_text=error,
            certificate=certificate,
            due=day("--due", due),
            by=by,
            when=now(),
        )
        show([f"event {event}"])
        return
    if bad is not None:
        if gauge is None or good_until is None or not by:
            raise wrong(
                "--bad",
                "Which gauge, until when it was good, and who says so must be given.",
                "Give GAUGE, --good and --by.",
            )
        pipeline.gauge_found_bad(
            register_at,
            given=gauge,
            what=bad,
            good_until=day("--good", good_until),
            on=day("--on", on),
            by=by,
            when=now(),
        )
    found = pipeline.instruments(register_at, on=day("--on", on), given=gauge)
    show(pipeline.instruments_json(found) if as_json else pipeline.instruments_text(found))


COMMANDS = (people, instruments)
