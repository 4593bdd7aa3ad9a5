# Outside witness of: `plan --json` and `forecast --json` as a whole, from the published formulas named in the modules of
# witness/. Cautions are left out. Ends with 0, 1 (no plan is on target) or 2 (refused; the reason on standard error).
#
#   python witness.py plan CASE [--to-paco2 45 | --to-ph 7.32] [--aim rate|volume|gentle] [--least load|power] ...
#   python witness.py forecast CASE [--rate 28 ...] [--monte-carlo 400000]

import json
import sys

from witness_run import run

if __name__ == "__main__":
    status, document, reason = run(sys.argv[1:])
    if document is not None:
        print(json.dumps(document, indent=1))
    if reason is not None:
        print(f"refused: {reason}", file=sys.stderr)
    sys.exit(status)
