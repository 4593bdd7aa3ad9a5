# Not a witness itself: recomputes every reference table of this folder (each script with --check) and closes with
# `N passed, N failed`; exit 1 when any differs.

import subprocess
import sys

import tables

SCRIPTS = ("breaths.py", "lungs.py", "gas_constants.py", "courses.py")


def main():
    passed, failed = 0, []
    for script in SCRIPTS:
        done = subprocess.run(
            [sys.executable, str(tables.FOLDER / script), "--check"], capture_output=True, text=True, timeout=600
        )
        print(done.stdout, end="")
        if done.returncode == 0:
            passed += 1
        else:
            failed.append(script)
            print(done.stderr, end="")
    for script in failed:
        print(f"differs or did not run: {script}")
    print(f"{passed} passed, {len(failed)} failed")
    sys.exit(1 if failed else 0)


if __name__ == "__main__":
    main()
