"""The profile of the virtual machine: everything fitted, readings live."""

from __future__ import annotations

from windctl.profile.model import Guide, MachineProfile, Readings, SpindleTable, TensionTable

# No pedal: nobody stands at a simulated one, and with it every start would wait for a foot.
VIRTUAL = MachineProfile(
    format=1,
    name="virtual",
    bench="v1",
    spindle=SpindleTable(drive="step", counts_per_turn=400, steps_per_turn=400, index=True, max_rpm=1500.0),
    guide=Guide(kind="step"),
    tension=TensionTable(sensor=True),
    pedal=False,
    readings=Readings(mode="live"),
)
