#!/usr/bin/python3
"""Eight-byte reals, as gdspy reads and writes them.

In:  {"Reals": [hexadecimal], "Floats": [number]}.
Out: {"Values": the reals as numbers, "Written": the numbers as reals in hexadecimal}.
"""
import json
import sys

import gdspy

q = json.load(sys.stdin)
json.dump({"Values": [gdspy._eight_byte_real_to_float(bytes.fromhex(r)) for r in q["Reals"]],
           "Written": [gdspy._eight_byte_real(f).hex() for f in q["Floats"]]}, sys.stdout)
