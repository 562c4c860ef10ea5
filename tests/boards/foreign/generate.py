"""Writes nets.csv of this folder: an exported list of 300 nets with foreign headers.

Run it from the project's root: python tests/boards/foreign/generate.py
"""

import random
from pathlib import Path

HEADER = '"Net Name","Net Class","Layer","Routed Length (mil)","Track Width (mil)","Via Count"'
SUPPLIES = ("GND", "AGND", "+3V3", "+1V8", "VDD_CORE", "VBUS")


def names() -> list[str]:
    """Return 300 names: buses, pairs, supplies and single nets."""
    buses = [f"{bus}{bit}" for bus, width in BUSES for bit in range(width)]
    pairs = [f"LANE{lane}_{half}" for lane in range(8) for half in "PN"]
    found = [*SUPPLIES, *pairs, *buses]
    return found + [f"GPIO_{number}" for number in range(300 - len(found))]


BUSES = (("MEM_A", 15), ("MEM_DQ", 32), ("DISP_D", 24), ("CAM_D", 12), ("HOST_AD", 64))


def main() -> None:
    """Write the list, a row per net and layer."""
    chance = random.Random(7)  # noqa: S311 - lengths, no secrets
    rows = [HEADER]
    for name in names():
        for layer in sorted(chance.sample(("TOP", "IN3", "BOTTOM"), chance.randint(1, 3))):
            length = chance.uniform(40, 2600)
            vias = chance.randint(0, 4)
            rows.append(f'"{name}","Default","{layer}","{length:.2f}","7.1","{vias}"')
    text = "\r\n".join(rows) + "\r\n"
    Path(__file__).with_name("nets.csv").write_bytes(b"\xef\xbb\xbf" + text.encode())


if __name__ == "__main__":
    main()
