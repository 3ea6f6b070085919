"""The conformance kit: takes any board through firmware_protocol/README.md over its port, clause by clause.

    python -m tests.firmware.conformance --port URL --machine PROFILE.toml

It knows of a board only what the line tells; what takes a hand is asked of one (`hands.py`).
"""
