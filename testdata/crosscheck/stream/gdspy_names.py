#!/usr/bin/python3
"""Names of the records by number, as gdspy knows them. In: anything. Out: a list."""
import json
import sys

import gdspy

json.load(sys.stdin)
json.dump(list(gdspy.GdsLibrary._record_name), sys.stdout)
