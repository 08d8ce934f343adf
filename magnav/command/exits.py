"""Exit codes of the command, and what each says."""

DONE, ARGUMENTS, FILE, REFUSED, BAD_ROWS, FAILED = 0, 2, 3, 4, 5, 6

MEANING = """exit codes:
  0  done
  2  an argument or a value is wrong
  3  a file cannot be read or trusted
  4  the calibration is refused
  5  done, but some rows were bad: good rows went through, bad ones are listed in the side file
  6  a check against a limit or a reference failed
"""
