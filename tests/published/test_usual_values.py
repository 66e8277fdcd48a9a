"""What Plateside takes where a plate is silent, and how sure it is where a plate speaks, against standards.

The tables of the NEC give currents for sizing cables and relays, above most plates: plausibility only.
"""

import math
from itertools import product

import pytest

from calc.dc.plate import read_plate as read_dc
from calc.induction_1ph.plate import read_plate as read_1ph
from calc.induction_3ph.plate import read_base
from calc.nameplate import check_plate
from calc.sheet_io import sheet_from_plain
from calc.typical import typical_efficiency, typical_locked_rotor_ratio, typical_power_factor
from tests.calc.dc.builders import machine as dc_machine
from tests.calc.induction_1ph.plates import machine as machine_1ph
from tests.calc.induction_3ph.plates import machine as machine_3ph
from tests.published.sources import column_table, published

HP_W = 745.69987


@published(
    "10 CFR 431.25", "enclosed motors at 60 Hz, the table of 1997", known="looked up",
    says="2, 4 and 6 poles, 1 to 200 hp: inside what is taken as usual (2.5 sigma of the losses)",
    checks=["calc.typical.typical_efficiency", "calc.induction_3ph.plate.read_base"],
)  # fmt: skip
@pytest.mark.parametrize("row", [r for r in column_table("efficiency_60_hz") if r["class"] == "IE2"])
def test_the_usual_efficiency_at_60_hz_leaves_room_for_the_regulated_one(row):
    poles, power_w = int(row["poles"]), 1e3 * float(row["kw"])
    usual = typical_efficiency(power_w=power_w, poles=poles, frequency_hz=60.0)
    speed = 0.975 * 7200.0 / poles
    base = read_base(machine_3ph(power=power_w, voltage=460.0, frequency=60.0, speed=speed, poles=poles))
    assert base.loss_share == pytest.approx(1.0 / usual - 1.0)
    regulated = 100.0 / float(row["percent"]) - 1.0
    assert abs(math.log(base.loss_share / regulated)) < 2.5 * base.loss_spread


@published(
    "10 CFR 431.25", "enclosed motors at 60 Hz, Table 1 of 2010", known="looked up",
    says="what is usual in plants, old and new, stays below the premium class; within 0.3 points at 1 hp",
    checks="calc.typical.typical_efficiency",
)  # fmt: skip
@pytest.mark.parametrize("row", [r for r in column_table("efficiency_60_hz") if r["class"] == "IE3"])
def test_the_usual_efficiency_stays_below_the_premium_class(row):
    usual = typical_efficiency(power_w=1e3 * float(row["kw"]), poles=int(row["poles"]), frequency_hz=60.0)
    assert 100.0 * usual < float(row["percent"])


@published(
    "NEMA MG 1", "12.35 at 230 V, over the rated current that is usual", known="looked up",
    says="the highest of design B lies inside what is taken as usual (2.5 sigma), from 5 hp",
    checks=["calc.typical.typical_locked_rotor_ratio", "calc.induction_3ph.plate.read_base"],
)  # fmt: skip
@pytest.mark.parametrize("row", [r for r in column_table("locked_rotor_230_v") if float(r["hp"]) >= 5.0])
def test_the_usual_locked_rotor_current_leaves_room_for_the_highest_of_design_b(row):
    base = read_base(machine_3ph(power=float(row["hp"]) * HP_W, voltage=230.0, frequency=60.0, speed=1760.0))
    amps = base.locked_ratio * base.current_a
    assert abs(math.log(amps / float(row["amps"]))) < 2.5 * base.locked_spread
    assert base.locked_ratio == typical_locked_rotor_ratio(power_w=float(row["hp"]) * HP_W, poles=4)


KVA_PER_KW = ((0.4, 22), (0.63, 19), (1.0, 17), (1.8, 15), (4, 14), (6.3, 13), (25, 12), (63, 11), (630, 10))


@published(
    "IEC 60034-12", "highest locked-rotor apparent power over rated output", known="from memory",
    says="22 kVA per kW up to 0.4 kW, falling to 10 up to 630 kW: what is usual stays below",
    checks=["calc.typical.typical_locked_rotor_ratio", "calc/tables/typical_locked_rotor_ratio.csv"],
)  # fmt: skip
@pytest.mark.parametrize(("size", "poles"), list(product(KVA_PER_KW, (2, 4, 6))))
def test_the_usual_locked_rotor_power_stays_below_the_highest_of_the_standard(size, poles):
    kw, highest = size
    eta = typical_efficiency(power_w=1e3 * kw, poles=poles, frequency_hz=50.0)
    ratio = typical_locked_rotor_ratio(power_w=1e3 * kw, poles=poles)
    assert 4.0 < ratio / (eta * typical_power_factor(power_w=1e3 * kw, poles=poles)) < highest


# Tolerances on what a plate declares.


@published(
    "IEC 60034-1", "tolerances: slip ±20 % from 1 kW, ±30 % below", known="looked up",
    says="the tolerance is two to three sigma of the slip that a plate tells",
    checks="calc.induction_3ph.plate.read_base",
)  # fmt: skip
@pytest.mark.parametrize(("power_w", "rpm", "tolerance"), [(7500.0, 1440.0, 0.20), (750.0, 1400.0, 0.30)])
def test_the_slip_of_a_plate_is_taken_as_sure_as_its_tolerance(power_w, rpm, tolerance):
    base = read_base(machine_3ph(power=power_w, voltage=400.0, frequency=50.0, speed=rpm))
    assert 2.0 < math.log1p(tolerance) / base.slip_spread < 3.0


@published(
    "IEC 60034-1", "tolerances: losses +15 %, power factor -1/6 of what it lacks", known="looked up",
    says="the tolerance is one to three sigma of losses and power factor that a plate tells",
    checks="calc.induction_3ph.plate.read_base",
)  # fmt: skip
@pytest.mark.parametrize(("eta", "power_factor"), [(88.7, 0.84), (78.0, 0.72), (95.0, 0.88)])
def test_losses_and_power_factor_of_a_plate_are_taken_as_sure_as_their_tolerances(eta, power_factor):
    plate = {"power": 7500.0, "voltage": 400.0, "frequency": 50.0, "speed": 1455.0}
    base = read_base(machine_3ph(**plate, efficiency=eta, power_factor=power_factor))
    assert 1.0 < math.log1p(0.15) / base.loss_spread < 3.0
    assert 1.0 < min(max((1.0 - power_factor) / 6.0, 0.02), 0.07) / base.power_factor_spread < 3.0


@published(
    "IEC 60034-1", "tolerances: locked-rotor current +20 %", known="looked up",
    says="the tolerance is two to three sigma of the ratio that a plate tells",
    checks="calc.induction_3ph.plate.read_base",
)  # fmt: skip
def test_the_locked_rotor_ratio_of_a_plate_is_taken_as_sure_as_its_tolerance():
    plate = {"power": 7500.0, "voltage": 400.0, "frequency": 50.0, "speed": 1455.0, "current": 14.9}
    base = read_base(machine_3ph(**plate, locked_rotor_current_ratio=6.5))
    assert base.locked_ratio == 6.5
    assert 2.0 < math.log1p(0.20) / base.locked_spread < 3.0


@published(
    "IEC 60034-1", "tolerances: losses +15 %, power factor -1/6 of what it lacks", known="looked up",
    says="a plate that is off by a whole tolerance is not remarked; amps that are off by 15 % are",
    checks=["calc.nameplate.check_plate", "calc/tables/plate_checks.yaml"],
)  # fmt: skip
@pytest.mark.parametrize(("power_w", "eta", "power_factor"), [(7500.0, 88.7, 0.84), (90e3, 95.0, 0.86)])
def test_a_plate_within_its_tolerances_does_not_contradict_itself(power_w, eta, power_factor):
    amps = power_w / (math.sqrt(3.0) * 400.0 * power_factor * eta / 100.0)
    plate = {"power": f"{power_w} W", "voltage": "400 V", "frequency": "50 Hz", "speed": "1475 rpm"}
    whole = {"efficiency": eta, "power_factor": power_factor, "current": amps}
    units = {"efficiency": " %", "current": " A", "power_factor": ""}

    def remarked(**fields):
        typed = {name: f"{number:.4g}{units[name]}" for name, number in (whole | fields).items()}
        machine = {"kind": "induction_3ph", "nameplate": plate | typed}
        sheet = sheet_from_plain({"format": 1, "machine": machine, "complaint": "routine_check"})
        return [one.id for one in check_plate(sheet.machine)]

    assert remarked() == []
    assert remarked(efficiency=eta - 0.15 * (100.0 - eta)) == []
    assert remarked(power_factor=power_factor - (1.0 - power_factor) / 6.0) == []
    assert remarked(current=1.15 * amps) == ["power_balance"]


TOTAL_LOSSES = ((3, 14, 35), (45, 6, 12), (550, 4, 7), (3000, 2.3, 4.5))  # hp inside the class, percent


@published(
    "IEEE 3001.5", "Table 1, total losses by size", known="looked up",
    says="1-10 hp 14-35 %, 10-200 hp 6-12 %, 200-1500 hp 4-7 %, above 1500 hp 2.3-4.5 %",
    checks="calc.typical.typical_efficiency",
)  # fmt: skip
@pytest.mark.parametrize(("hp", "low", "high"), TOTAL_LOSSES)
def test_the_usual_losses_of_a_size_lie_in_the_published_range(hp, low, high):
    power_w = hp * HP_W
    usual = 100.0 * (1.0 - typical_efficiency(power_w=power_w, poles=4, frequency_hz=60.0))
    assert low < usual < high


# Rated currents where a plate is silent: plausibility.


@published(
    "NEC", "Table 430.250, three-phase motors", known="looked up",
    says="sizing currents from 1/2 hp to 500 hp, 115 to 2300 V: the usual current is 72 to 100 % of them",
    checks=["calc.induction_3ph.plate.read_base", "calc.typical.typical_power_factor",
            "calc/tables/typical_power_factor.csv"],
)  # fmt: skip
@pytest.mark.parametrize("row", column_table("nec_three_phase"))
def test_the_usual_current_of_a_three_phase_motor_lies_a_little_below_the_sizing_current(row):
    plate = {"power": float(row["hp"]) * HP_W, "voltage": float(row["volts"]), "frequency": 60.0}
    share = read_base(machine_3ph(**plate, speed=1760.0)).current_a / float(row["amps"])
    assert (0.82 if float(row["hp"]) >= 2.0 else 0.72) < share < 1.0


def of_dc(row):
    return published(
        "NEC", "Table 430.247, DC motors", known=row["known"], checks="calc.dc.plate.read_plate",
        says="sizing currents at 90 to 550 V: the usual one is 84 to 100 % of them, 70 to 90 % below 1 hp",
    )  # fmt: skip


@pytest.mark.parametrize("row", [pytest.param(r, marks=of_dc(r)) for r in column_table("nec_dc")])
def test_the_usual_armature_current_of_a_dc_motor_lies_a_little_below_the_sizing_current(row):
    plate = {"power": f"{row['hp']} hp", "voltage": f"{row['volts']} V", "speed": "1750 rpm"}
    share = read_dc(dc_machine("dc_separately_excited", plate)).current_a / float(row["amps"])
    low, high = (0.84, 1.0) if float(row["hp"]) >= 1.0 else (0.70, 0.90)
    assert low < share < high


@published(
    "NEC", "Table 430.248, single-phase motors", known="looked up",
    says="sizing currents, 1/6 to 10 hp: the usual one of a capacitor-start motor is 75 to 115 % of them",
    checks="calc.induction_1ph.plate.read_plate",
)  # fmt: skip
@pytest.mark.parametrize("row", column_table("nec_single_phase"))
def test_the_usual_current_of_a_capacitor_start_motor_lies_around_the_sizing_current(row):
    plate = {"power": float(row["hp"]) * HP_W, "voltage": float(row["volts"]), "frequency": 60.0}
    amps = read_1ph(machine_1ph(plate | {"speed": 1725.0})).base_current_a("capacitor_start")
    assert 0.75 < amps / float(row["amps"]) < 1.15
