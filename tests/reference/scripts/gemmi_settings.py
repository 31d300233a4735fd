"""Writes ../gemmi_settings.csv: every entry of gemmi's table of space-group settings (gemmi 0.7.5, MPL-2.0).

    pip install gemmi==0.7.5 && python gemmi_settings.py
"""
import csv
import pathlib

import gemmi

assert gemmi.__version__ == "0.7.5", gemmi.__version__
path = pathlib.Path(__file__).parent.parent / "gemmi_settings.csv"
with open(path, "w", newline="") as f:
    f.write("# gemmi 0.7.5, spacegroup_table(): number, Hermann-Mauguin symbol with its setting, Hall symbol, and what follows\n")
    f.write("# from the operators (Laue class by its symbol, number of operators with centring)\n")
    w = csv.writer(f)
    w.writerow(["number", "xhm", "hall", "laue_class", "operators"])
    for sg in gemmi.spacegroup_table():
        w.writerow([sg.number, sg.xhm(), sg.hall, sg.laue_str(), len(list(sg.operations()))])
