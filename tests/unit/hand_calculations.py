"""The answers of the ready cases, worked out by hand: the property library called directly, no part of the service.

Each function repeats the numbers of its case, so that a slip in either shows. Everything is in SI units; the library's
string interface is another path than the service's, and iterations here are plain brentq on a temperature.
"""

from __future__ import annotations

import math
from collections.abc import Callable

from CoolProp.CoolProp import HAPropsSI, PropsSI
from scipy.integrate import quad
from scipy.optimize import brentq, minimize_scalar

ATM = 1.002e5  # [Pa] of the works
C = 273.15
G = 9.80665  # [m/s2] standard gravity, CGPM 1901
R = 8.314462618  # [J/(mol K)] CODATA 2018
NORMAL = 101_325.0 / (R * 273.15)  # [mol/m3] ideal gas at 0 degC, 101.325 kPa
TONNE_PER_HOUR = 1000.0 / 3600.0

Answers = dict[str, float]


def barg(p: float) -> float:
    return p * 1e5 + ATM


def prop(name: str, one: str, a: float, two: str, b: float, fluid: str = "Water") -> float:
    return float(PropsSI(name, one, a, two, b, fluid))


def h_pt(p: float, celsius: float, fluid: str = "Water") -> float:
    return prop("H", "P", p, "T", celsius + C, fluid)


def expand(p1: float, T1: float, p2: float, eta: float, fluid: str = "Water") -> tuple[float, float]:
    """(h1, h2) [J/kg] of an expansion with an isentropic efficiency."""
    h1 = prop("H", "P", p1, "T", T1, fluid)
    ideal = prop("H", "P", p2, "S", prop("S", "P", p1, "T", T1, fluid), fluid)
    return h1, h1 - eta * (h1 - ideal)


def compress(p1: float, T1: float, p2: float, eta: float, fluid: str = "Water") -> tuple[float, float]:
    """(h1, h2) [J/kg] of a compression with an isentropic efficiency."""
    h1 = prop("H", "P", p1, "T", T1, fluid)
    ideal = prop("H", "P", p2, "S", prop("S", "P", p1, "T", T1, fluid), fluid)
    return h1, h1 + (ideal - h1) / eta


def log_mean(a: float, b: float) -> float:
    return (a - b) / math.log(a / b)


# --- steam and water -----------------------------------------------------------------------------------------------


def let_down_valve() -> Answers:
    h = h_pt(barg(40), 400.0) - 15e3 / (12 * TONNE_PER_HOUR)
    return {"outlet.T": prop("T", "P", barg(10), "H", h)}


def desuperheater() -> Answers:
    T = prop("T", "P", barg(9.8), "Q", 1) + 10.0
    steam, spray, out = h_pt(barg(10), 374.0), h_pt(barg(25), 105.0), prop("H", "P", barg(9.8), "T", T)
    m = 12 * TONNE_PER_HOUR * (steam - out) / (out - spray)
    return {"spray.mass_flow": m, "process-steam.mass_flow": 12 * TONNE_PER_HOUR + m, "process-steam.T": T}


def turbine_power() -> Answers:
    m = 25 * TONNE_PER_HOUR
    h1, h2 = expand(barg(42), 420 + C, barg(4), 0.74)
    w1 = m / (prop("D", "P", barg(42), "T", 420 + C) * math.pi / 4 * 0.15**2)
    w2 = m / (prop("D", "P", barg(4), "H", h2) * math.pi / 4 * 0.35**2)
    shaft = m * (h1 - h2 + 0.5 * w1**2 - 0.5 * w2**2) - 12e3
    T = prop("T", "P", barg(4), "H", h2)
    return {"exhaust.T": T, "shaft.rate": shaft, "power.rate": 0.95 * shaft, "generator-loss.rate": 0.05 * shaft}


def turbine_from_readings(m: float, p1: float, T1: float, p2: float, T2: float) -> tuple[float, float]:
    """(shaft power [W], isentropic efficiency) from the five readings."""
    h1, h2 = prop("H", "P", p1, "T", T1), prop("H", "P", p2, "T", T2)
    ideal = prop("H", "P", p2, "S", prop("S", "P", p1, "T", T1))
    return m * (h1 - h2), (h1 - h2) / (h1 - ideal)


def turbine_efficiency() -> Answers:
    shaft, eta = turbine_from_readings(24.6 * TONNE_PER_HOUR, barg(41.8), 418 + C, barg(4.05), 221 + C)
    return {"shaft.rate": shaft, "efficiency.value": eta}


def boiler() -> Answers:
    steam = 30 * TONNE_PER_HOUR
    feed = steam / 0.97
    water, blown = h_pt(barg(50), 105.0), prop("H", "P", barg(44), "Q", 0)
    fuel = (steam * h_pt(barg(42), 420.0) + 0.03 * feed * blown - feed * water) / 0.91
    return {
        "feed.mass_flow": feed, "blowdown.mass_flow": 0.03 * feed, "gas.normal_volume_flow": fuel / 36.1e6,
        "gas.rate": fuel, "losses.rate": 0.09 * fuel,
    }  # fmt: skip


def deaerator() -> Answers:
    out, vent, condensate = 32 * TONNE_PER_HOUR, 0.06 * TONNE_PER_HOUR, 19 * TONNE_PER_HOUR
    cold, warm, steam = h_pt(barg(3), 18.0), h_pt(barg(3), 82.0), h_pt(barg(4), 221.0)
    liquid, vapour = prop("H", "P", barg(0.2), "Q", 0), prop("H", "P", barg(0.2), "Q", 1)
    entering = out + vent - condensate
    needed = out * liquid + vent * vapour + 8e3 - condensate * warm
    m = (needed - entering * cold) / (steam - cold)
    T = prop("T", "P", barg(0.2), "Q", 0)
    return {"make-up.mass_flow": entering - m, "heating-steam.mass_flow": m, "feed-water.T": T}


def feed_pump() -> Answers:
    m = 32 * TONNE_PER_HOUR
    h1, h2 = compress(barg(0.75), 105 + C, barg(52), 0.68)
    w1 = m / (prop("D", "P", barg(0.75), "T", 105 + C) * math.pi / 4 * 0.125**2)
    w2 = m / (prop("D", "P", barg(52), "H", h2) * math.pi / 4 * 0.08**2)
    shaft = m * (h2 - h1 + 0.5 * (w2**2 - w1**2) + G * 1.2)
    mains = shaft / 0.94
    T = prop("T", "P", barg(52), "H", h2)
    return {"discharge.T": T, "shaft.rate": shaft, "mains.rate": mains, "motor-heat.rate": mains - shaft}


def circulation_pump() -> Answers:
    h1, new = compress(barg(2.9), 75 + C, barg(5.3), 0.78)
    m = 180 / 3600 * prop("D", "P", barg(2.9), "T", 75 + C)
    ideal = 0.78 * (new - h1)
    mains_new = m * (new - h1) / 0.92
    shaft = 0.92 * 21e3
    return {
        "shaft.rate": shaft, "mains-new.rate": mains_new, "efficiency.value": ideal * m / shaft,
        "cost-of-wear.value": 21e3 - mains_new,
    }  # fmt: skip


def flash_drum() -> Answers:
    m, h = 928 / 3600, prop("H", "P", barg(44), "Q", 0)
    liquid, vapour = prop("H", "P", barg(0.3), "Q", 0), prop("H", "P", barg(0.3), "Q", 1)
    x = (h - liquid) / (vapour - liquid)
    T = prop("T", "P", barg(0.3), "Q", 0)
    return {"flash-steam.mass_flow": m * x, "water.mass_flow": m * (1 - x), "water.T": T, "share.value": x}


def leaking_trap() -> Answers:
    p1 = barg(9.8)
    h1, s1 = prop("H", "P", p1, "Q", 1), prop("S", "P", p1, "Q", 1)

    def flux(p: float) -> float:
        return prop("D", "P", p, "S", s1) * math.sqrt(2 * (h1 - prop("H", "P", p, "S", s1)))

    choked = minimize_scalar(lambda p: -flux(p), bounds=(0.4 * p1, 0.7 * p1), method="bounded")
    m = 0.72 * math.pi / 4 * 0.004**2 * -choked.fun
    return {"leak.mass_flow": m, "lost-heat.rate": m * (h1 - h_pt(barg(3), 15.0))}


def steam_nozzle() -> Answers:
    h1, h2 = expand(barg(9), 230 + C, barg(0.4), 0.94)
    w = math.sqrt(32.0**2 + 2 * (h1 - h2))
    area = 850 / 3600 / (prop("D", "P", barg(0.4), "H", h2) * w)
    return {"jet.velocity": w, "jet.bore": math.sqrt(4 * area / math.pi)}


def mixing_tee() -> Answers:
    hot, cold, out = h_pt(barg(3), 82.0), h_pt(barg(3), 14.0), h_pt(barg(2.8), 45.0)
    m = 6 * TONNE_PER_HOUR
    share = (out - cold) / (hot - cold)
    return {"hot.mass_flow": m * share, "cold.mass_flow": m * (1 - share)}


def metering_network() -> Answers:
    east = 18.4 + 12.6 - 14.2
    finishing = east - 3.9 - 1.1
    return {"to-east.mass_flow": east * TONNE_PER_HOUR, "to-finishing.mass_flow": finishing * TONNE_PER_HOUR}


def steam_power_loop() -> Answers:
    h1, h2 = expand(40e5, 420 + C, 0.1e5, 0.78)
    h3, s3 = prop("H", "P", 0.1e5, "Q", 0), prop("S", "P", 0.1e5, "Q", 0)
    h4 = h3 + (prop("H", "P", 45e5, "S", s3) - h3) / 0.6
    m = 2e6 / (h1 - h2)
    fuel = m * (h1 - h4) / 0.86
    cooling = m * (h2 - h3) / (h_pt(2.0e5, 28.0) - h_pt(2.5e5, 18.0))
    return {
        "live-steam.mass_flow": m, "exhaust.x": prop("Q", "P", 0.1e5, "H", h2), "feed.T": prop("T", "P", 45e5, "H", h4),
        "cooling-water-in.mass_flow": cooling, "chips.mass_flow": fuel / 12.5e6, "boiler-loss.rate": 0.14 * fuel,
        "pump-shaft.rate": m * (h4 - h3), "plant-efficiency.value": 2e6 / fuel,
    }  # fmt: skip


def feedwater_heater_us() -> Answers:
    """Water by IF97, through the library's own back end for it."""
    psi, foot, pound, btu = 6894.757293168, 0.3048, 0.45359237, 1055.05585262  # NIST SP 811, appendix B
    gallon = 231 * (foot / 12) ** 3

    def kelvin(fahrenheit: float) -> float:
        return (fahrenheit + 459.67) / 1.8

    def pressure(psig: float) -> float:
        return (psig + 14.53) * psi

    def h(psig: float, T: float) -> float:
        return prop("H", "P", pressure(psig), "T", T, "IF97::Water")

    T = prop("T", "P", pressure(60), "Q", 0, "IF97::Water") - 15 / 1.8
    feed = 140 * gallon / 60 * prop("D", "P", pressure(650), "T", kelvin(220), "IF97::Water")
    duty = feed * (h(640, kelvin(290)) - h(650, kelvin(220))) + 12_000 * btu / 3600
    assert pound > 0
    return {"steam.mass_flow": duty / (h(60, kelvin(340)) - h(60, T)), "drain.T": T}


# --- exchangers ----------------------------------------------------------------------------------------------------


def shell_and_tube_flow() -> Answers:
    duty = 18 * TONNE_PER_HOUR * (h_pt(barg(4), 96.0) - h_pt(barg(3.7), 55.0)) - 4e3
    rise = h_pt(barg(2.4), 43.0) - h_pt(barg(3), 24.0)
    areas = [prop("D", "P", p, "T", T + C) * math.pi / 4 * 0.1**2 for p, T in ((barg(3), 24.0), (barg(2.4), 43.0))]

    def missing(m: float) -> float:
        return m * (rise + 0.5 * ((m / areas[1]) ** 2 - (m / areas[0]) ** 2)) - duty

    m = brentq(missing, 1.0, 50.0, xtol=1e-13)
    return {"water-in.mass_flow": m, "water-in.velocity": m / areas[0]}


def exchanger_ua() -> Answers:
    """F for one shell pass and an even number of tube passes: Bowman, Mueller and Nagle 1940."""
    inlet = h_pt(barg(3), 23.0)
    duty = 38 * TONNE_PER_HOUR * (h_pt(barg(2.6), 31.5) - inlet)
    oil = duty / (2020.0 * 19.0)
    ratio, share = 19.0 / 8.5, 8.5 / 45.0
    root = math.sqrt(ratio**2 + 1)
    top = root / (ratio - 1) * math.log((1 - share) / (1 - share * ratio))
    factor = top / math.log((2 - share * (ratio + 1 - root)) / (2 - share * (ratio + 1 + root)))
    largest = min(oil * 2020.0 * 45.0, 38 * TONNE_PER_HOUR * (h_pt(barg(2.6), 68.0) - inlet))
    return {
        "oil-in.mass_flow": oil, "duty.rate": duty, "rating.value": duty / (factor * log_mean(36.5, 26.0)),
        "effectiveness.value": duty / largest,
    }  # fmt: skip


def thermal_oil_heater() -> Answers:
    """Counterflow of constant heat capacities, in closed form: e-NTU (Kays and London)."""
    hot, cold = 30 * TONNE_PER_HOUR * 2450, 18 * TONNE_PER_HOUR * 2900
    c, units = cold / hot, 13e3 / cold
    effectiveness = (1 - math.exp(-units * (1 - c))) / (1 - c * math.exp(-units * (1 - c)))
    duty = effectiveness * cold * 180.0
    return {"oil-out.T": 240 + C - duty / hot, "liquid-out.T": 60 + C + duty / cold, "duty.rate": duty}


def jacketed_vessel() -> Answers:
    capacity = 2.4 / 3600 * 1320 * 2600
    T = (capacity * 22 + 1600 * 133 + 3500) / (capacity + 1600)
    return {"syrup-out.T": T + C, "jacket.rate": 1600 * (133 - T)}


def glycol_cooler() -> Answers:
    fluid = "INCOMP::MEG[0.30]"
    glycol = 20 / 3600 * prop("D", "P", barg(2), "T", 45 + C, fluid)
    air = 25.0 * ATM * 0.02896 / (R * (28 + C))
    inlet = h_pt(barg(2), 45.0, fluid)
    duty = 0.62 * min(glycol * (inlet - h_pt(barg(1.6), 28.0, fluid)), air * 1006 * 17.0)
    target = inlet - duty / glycol
    T = brentq(lambda t: h_pt(barg(1.6), t, fluid) - target, 20.0, 45.0, xtol=1e-12)
    return {"glycol-out.T": T + C, "air-out.T": 28 + C + duty / (air * 1006), "duty.rate": duty}


FLUE_GAS = {"Nitrogen": 0.715, "CarbonDioxide": 0.08, "Water": 0.165, "Oxygen": 0.04}


def economiser() -> Answers:
    """The enthalpy of the ideal gas by quadrature of the library's cp of the ideal gas, on one gas constant."""
    moles = 27000 / 3600 * NORMAL

    def cp(T: float) -> float:
        return sum(
            x * prop("CP0MOLAR", "P", 1e5, "T", T, name) * R / prop("GAS_CONSTANT", "P", 1e5, "T", T, name)
            for name, x in FLUE_GAS.items()
        )

    duty = moles * quad(cp, 140 + C, 235 + C, epsabs=0, epsrel=1e-10)[0]
    T = prop("T", "P", barg(50), "H", h_pt(barg(51), 105.0) + duty / (31 * TONNE_PER_HOUR))
    return {"feed-out.T": T, "recovered.rate": duty, "surface.value": duty / log_mean(235 + C - T, 35.0)}


# --- gases and refrigerants ----------------------------------------------------------------------------------------


def air_compressor() -> Answers:
    m = 2000 / 3600 * NORMAL * prop("M", "P", 1e5, "T", 300, "Air")
    h1, s1 = h_pt(0.99e5, 22.0, "Air"), prop("S", "P", 0.99e5, "T", 22 + C, "Air")

    def polytropic(T: float) -> float:
        rise = prop("H", "P", 2.9e5, "T", T, "Air") - h1
        friction = (prop("S", "P", 2.9e5, "T", T, "Air") - s1) * log_mean(T, 22 + C)
        return (rise - friction) / rise - 0.78

    T2 = brentq(polytropic, 390.0, 500.0, xtol=1e-11)
    first = m * (prop("H", "P", 2.9e5, "T", T2, "Air") - h1)
    h3, h4 = compress(2.8e5, 38 + C, 8e5, 0.75, "Air")
    second = m * (h4 - h3)
    water = (m * (prop("H", "P", 2.9e5, "T", T2, "Air") - h3)) / (h_pt(2.6e5, 34.0) - h_pt(3e5, 24.0))
    return {
        "hot-air.T": T2, "delivery.T": prop("T", "P", 8e5, "H", h4, "Air"), "water-in.mass_flow": water,
        "shaft-1.rate": first, "shaft-2.rate": second, "both-stages.value": first + second,
    }  # fmt: skip


def gas_let_down() -> Answers:
    fractions = {"Methane": 0.93, "Ethane": 0.04, "Nitrogen": 0.03}
    mixture = "&".join(f"{name}[{x}]" for name, x in fractions.items())
    m = 5000 / 3600 * NORMAL * sum(x * prop("M", "P", 1e5, "T", 300, name) for name, x in fractions.items())

    def h(p: float, T: float) -> float:
        return float(PropsSI("H", "P", p, "T|gas", T, mixture))

    target = h(barg(3), 5 + C)
    T = brentq(lambda t: h(barg(37.7), t) - target, 280.0, 310.0, xtol=1e-10)
    heat = m * (target - h(barg(38), 8 + C))
    water = heat / (h_pt(barg(2.5), 80.0) - h_pt(barg(2.3), 60.0))
    return {"warm-gas.T": T, "water-in.mass_flow": water, "heat.rate": heat}


def refrigeration_evaporator() -> Answers:
    fluid = "INCOMP::MEG[0.35]"
    glycol = 60 / 3600 * prop("D", "P", 3e5, "T", -2 + C, fluid)
    cooling = glycol * (h_pt(3e5, -2.0, fluid) - h_pt(2.5e5, -6.0, fluid))
    liquid = h_pt(13.5e5, 30.0, "Ammonia")
    T = prop("T", "P", 2.68e5, "Q", 1, "Ammonia") + 4.0
    m = (cooling + 3e3) / (prop("H", "P", 2.68e5, "T", T, "Ammonia") - liquid)
    x = prop("Q", "P", 2.68e5, "H", liquid, "Ammonia")
    return {"liquid-ammonia.mass_flow": m, "flashed.x": x, "suction-gas.T": T, "cooling.rate": cooling}


def refrigeration_condenser() -> Answers:
    heat = 820 / 3600 * (h_pt(13.5e5, 118.0, "Ammonia") - prop("H", "P", 13.5e5, "Q", 0, "Ammonia"))
    water = 42 / 3600 * prop("D", "P", 3e5, "T", 19 + C)
    T = prop("T", "P", 2.5e5, "H", h_pt(3e5, 19.0) + heat / water)
    boiling = prop("T", "P", 13.5e5, "Q", 0, "Ammonia")
    return {"liquid.T": boiling, "warm-water.T": T, "approach.value": boiling - T}


def chiller_loop() -> Answers:
    low = prop("P", "T", 3 + C, "Q", 1, "R134a")
    h1, h2 = compress(low, 9 + C, 10.7e5, 0.72, "R134a")
    h3 = prop("H", "P", 10.7e5, "T", prop("T", "P", 10.7e5, "Q", 0, "R134a") - 4.0, "R134a")
    m = 350e3 / (h1 - h3)
    return {
        "suction.mass_flow": m, "discharge.T": prop("T", "P", 10.7e5, "H", h2, "R134a"),
        "flashed.x": prop("Q", "P", low, "H", h3, "R134a"), "shaft.rate": m * (h2 - h1),
        "rejected.rate": m * (h2 - h3), "performance.value": (h1 - h3) / (h2 - h1),
    }  # fmt: skip


# --- humid air -----------------------------------------------------------------------------------------------------


def water_shift() -> float:
    """[J/kg] by which the library's water in air lies above its water on its own, read at a vanishing pressure."""
    p, T = 20.0, 320.0
    dry, wet = (float(HAPropsSI("H", "T", T, "P", p, "W", w)) for w in (4.0, 8.0))
    return (wet - dry) / 4.0 - prop("H", "P", p, "T", T)


def moist(p: float, celsius: float, name: str, value: float) -> tuple[float, float, float]:
    """(humidity ratio, h [J/kg dry air], v [m3/kg dry air]) of moist air, water on the zero of IAPWS-95."""
    T = celsius + C
    w = value if name == "W" else float(HAPropsSI("W", "T", T, "P", p, name, value))
    h = float(HAPropsSI("H", "T", T, "P", p, "W", w)) - w * water_shift()
    return w, h, float(HAPropsSI("V", "T", T, "P", p, "W", w))


def fan() -> Answers:
    """The ideal rise by integrating dh = v dp, with h and v of moist air only."""
    p1, p2 = ATM - 300.0, ATM + 1500.0
    w, h1, v1 = moist(p1, 21.0, "R", 0.55)

    def temperature(p: float, h: float) -> float:
        return float(brentq(lambda t: moist(p, t, "W", w)[1] - h, 10.0, 40.0, xtol=1e-12))

    def slope(p: float, h: float) -> float:
        return moist(p, temperature(p, h), "W", w)[2]

    h, steps = h1, 4
    step = (p2 - p1) / steps
    for i in range(steps):  # Runge and Kutta's rule of fourth order
        p = p1 + i * step
        k1 = slope(p, h)
        k2 = slope(p + step / 2, h + step / 2 * k1)
        k3 = slope(p + step / 2, h + step / 2 * k2)
        h += step / 6 * (k1 + 2 * k2 + 2 * k3 + slope(p + step, h + step * k3))
    h2 = h1 + (h - h1) / 0.62
    T = temperature(p2, h2)
    relative = float(HAPropsSI("R", "T", T + C, "P", p2, "W", w))
    return {"supply-air.T": T + C, "supply-air.relative_humidity": relative, "motor.rate": 10.0 / v1 * (h2 - h1)}


def air_handling_coil() -> Answers:
    w1, h1, v1 = moist(ATM, 30.0, "R", 0.55)
    w2, h2, _ = moist(ATM - 200.0, 13.0, "R", 0.95)
    air = 12000 / 3600 / v1
    drained = air * (w1 - w2)
    cooling = air * (h1 - h2) - drained * h_pt(ATM, 13.0)
    water = cooling / (h_pt(barg(2.6), 12.0) - h_pt(barg(3), 6.0))
    return {"condensate.mass_flow": drained, "chilled-water-in.mass_flow": water}


def air_mixing_box() -> Answers:
    w1, h1, _ = moist(ATM, 21.0, "R", 0.45)
    w2, h2, _ = moist(ATM, -6.0, "R", 0.85)
    w, h = 0.75 * w1 + 0.25 * w2, 0.75 * h1 + 0.25 * h2
    air = 9.0 / (1 + w)
    T = float(brentq(lambda t: moist(ATM, t, "W", w)[1] - h, 5.0, 21.0, xtol=1e-12))
    relative = float(HAPropsSI("R", "T", T + C, "P", ATM, "W", w))
    return {
        "return-air.dry_air_flow": 0.75 * air, "outside-air.dry_air_flow": 0.25 * air, "mixed-air.T": T + C,
        "mixed-air.relative_humidity": relative,
    }  # fmt: skip


def cooling_tower() -> Answers:
    # the thermodynamic wet bulb: water at that temperature saturates the air adiabatically
    bulb, h_bulb, _ = moist(ATM, 17.0, "R", 1.0)
    water_bulb = h_pt(ATM, 17.0)
    w1 = float(
        brentq(lambda w: moist(ATM, 22.0, "W", w)[1] + (bulb - w) * water_bulb - h_bulb, 0.005, 0.015, xtol=1e-15)
    )
    _, h1, v1 = moist(ATM, 22.0, "W", w1)
    w2, h2, _ = moist(ATM, 31.0, "R", 1.0)
    water = 400 * TONNE_PER_HOUR
    cold = h_pt(barg(0.1), 26.0)
    per_air = w2 - w1  # evaporation per kg of dry air; make-up is 4/3 of it, blow-down 1/3
    gained = h2 - h1 - per_air * (4 * h_pt(barg(2), 16.0) - cold) / 3
    air = (water * (h_pt(barg(1.5), 36.0) - cold) + 22e3) / gained
    evaporated = air * per_air
    return {
        "make-up.mass_flow": evaporated * 4 / 3, "blow-down.mass_flow": evaporated / 3, "air-in.dry_air_flow": air,
        "air-in.volume_flow": air * v1, "evaporation.value": evaporated,
    }  # fmt: skip


def dryer() -> Answers:
    dry = 2.5 * TONNE_PER_HOUR
    evaporated = 0.15 * dry
    _, h1, _ = moist(ATM, 125.0, "W", 0.009)
    fixed = dry * (920 * 38 + 0.03 * h_pt(ATM, 58.0) - 0.18 * h_pt(ATM, 20.0)) + 25e3

    def missing(w2: float) -> float:
        return evaporated / (w2 - 0.009) * (h1 - moist(ATM, 62.0, "W", w2)[1]) - fixed

    w2 = float(brentq(missing, 0.015, 0.1, xtol=1e-15))
    air = evaporated / (w2 - 0.009)
    relative = float(HAPropsSI("R", "T", 62 + C, "P", ATM, "W", w2))
    return {
        "hot-air.mass_flow": air * 1.009, "exhaust-air.humidity_ratio": w2, "exhaust-air.relative_humidity": relative,
        "evaporation.value": evaporated,
    }  # fmt: skip


BY_HAND: dict[str, Callable[[], Answers]] = {
    function.__name__.replace("_", "-"): function
    for function in (
        air_compressor, air_handling_coil, air_mixing_box, boiler, chiller_loop, circulation_pump, cooling_tower,
        deaerator, desuperheater, dryer, economiser, exchanger_ua, fan, feed_pump, feedwater_heater_us, flash_drum,
        gas_let_down, glycol_cooler, jacketed_vessel, leaking_trap, let_down_valve, metering_network, mixing_tee,
        refrigeration_condenser, refrigeration_evaporator, shell_and_tube_flow, steam_nozzle, steam_power_loop,
        thermal_oil_heater, turbine_efficiency, turbine_power,
    )
}  # fmt: skip
"""Name of the ready case → what it asks, worked out by hand [SI]."""
