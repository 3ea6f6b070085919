"""`windctl machine`: the machines that are known, and the virtual one as a process of its own."""

from __future__ import annotations

from pathlib import Path

import click

from windctl.cli import present
from windctl.cli.machine_check import check
from windctl.cli.options import Shared, takes
from windctl.desk import places
from windctl.desk.machines import NO_BOARD, KnownMachine, kept_profiles, known_machines, profile_of
from windctl.errors import ProfileError, UsageError


@click.group()
def machine() -> None:
    """Machines: their profiles, and the simulated one."""


machine.add_command(check)


@machine.command("list", short_help="The machines that have a profile.")
@takes("json")
def list_(shared: Shared) -> None:
    """The machines that have a profile; the usual one is marked."""
    known = known_machines()
    if shared.json:
        present.result_json(
            {
                "machines": [
                    {
                        "machine": one.name,
                        "bench": one.bench,
                        "port": one.port,
                        "counter": "read" if one.by_eye else "board",
                        "file": None if one.file is None else str(one.file),
                        "problem": one.problem,
                        "usual": one.usual,
                    }
                    for one in known
                ]
            }
        )
        return
    present.table(
        ["", "machine", "bench", "port"],
        [
            ["*" if one.usual else "", one.name, one.bench or "", one.problem or one.port or _no_port(one)]
            for one in known
        ],
    )
    present.message(f"profiles are kept in {places.machines_folder()}")


def _no_port(one: KnownMachine) -> str:
    return "none: its counter is read by eye" if one.by_eye else ""


@machine.command(short_help="The serial ports, and what is on them.")
@takes("json")
def ports(shared: Shared) -> None:
    """The serial ports of this computer: what is on them, whose profile names them, and who has them."""
    from windctl.machine.port_lock import holder_of
    from windctl.machine.ports_listed import listed_ports

    owners = _owners()
    rows = []
    for port in listed_ports():
        holder = holder_of(port.url)
        busy = None if holder is None else {"pid": holder.pid, "coil": holder.coil, "since": holder.since}
        rows.append(
            {
                "port": port.url,
                "description": port.description,
                "usb": port.usb or None,
                "serial_number": port.serial_number or None,
                "machines": owners.get(port.url, []),
                "in_use": busy,
            }
        )
    if shared.json:
        present.result_json({"ports": rows})
        return
    if not rows:
        present.message(
            "no serial port is there; plug the board in, and on Linux see that you are in group dialout"
        )
        return
    present.table(
        ["port", "on it", "usb", "machine", ""],
        [
            [
                str(row["port"]),
                str(row["description"]),
                str(row["usb"] or ""),
                ", ".join(owners.get(str(row["port"]), [])),
                "in use" if row["in_use"] else "",
            ]
            for row in rows
        ],
    )


def _owners() -> dict[str, list[str]]:
    """Names of kept machines by the port that their profile names. Profiles that are invalid name none."""
    from windctl.profile.load import load_profile

    owners: dict[str, list[str]] = {}
    for name, file in kept_profiles().items():
        try:
            url = load_profile(file).port.url
        except ProfileError:
            continue
        if url is not None:
            owners.setdefault(url, []).append(name)
    return owners


@machine.command(short_help="The simulated board as a process of its own.")
@click.option(
    "--recipe",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="Whose bobbin and wire are on the bench; else an ordinary single coil.",
)
@click.option(
    "--tcp",
    metavar="HOST:PORT",
    default="127.0.0.1:0",
    show_default=True,
    help="Where to listen; port 0 takes a free one.",
)
@click.option("--pty", is_flag=True, help="A pseudo-terminal instead (POSIX): opens like a serial device.")
@click.option(
    "--resets-on-open",
    is_flag=True,
    default=None,
    help="The board restarts whenever its port is opened, as many do; else as the profile says.",
)
@click.option(
    "--trace",
    type=click.Path(dir_okay=False, path_type=Path),
    metavar="FILE",
    help="Write what the board does.",
)
@takes("machine", "speed", "plant_seed", "readings")
def serve(
    shared: Shared, recipe: Path | None, tcp: str, pty: bool, resets_on_open: bool | None, trace: Path | None
) -> None:
    """Run the simulated board as a process of its own, until Ctrl-C or SIGTERM.

    The first line on standard output is the URL for --port. SIGUSR1 resets the board.
    """
    from windctl.desk.bench import DEFAULT_SEED
    from windctl.desk.ordinary import ORDINARY
    from windctl.machine.virtual.serve import serve as serve_machine
    from windctl.recipe.load import load_recipe, parse_recipe

    wanted = parse_recipe(ORDINARY, "ordinary coil") if recipe is None else load_recipe(recipe)
    host, port = _address(tcp)
    profile = profile_of(shared)
    if profile.by_eye:
        raise UsageError(f"there is no board to simulate: {NO_BOARD}")
    serve_machine(
        wanted,
        profile,
        seed=shared.plant_seed if shared.plant_seed is not None else DEFAULT_SEED,
        speed=shared.speed if shared.speed is not None else 1.0,
        host=host,
        port=port,
        pty=pty,
        trace=trace,
        resets_on_open=resets_on_open,
    )


def _address(text: str) -> tuple[str, int]:
    host, _, port = text.rpartition(":")
    if not host or not port.isdecimal() or int(port) > 65_535:
        raise click.BadParameter(f"{text!r} is not HOST:PORT, such as 127.0.0.1:7000", param_hint="--tcp")
    return host.strip("[]"), int(port)
