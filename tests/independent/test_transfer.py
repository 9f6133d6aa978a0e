"""Engine and dense evaluation held to two reference libraries: python-control and scipy.signal.

The libraries get the circuit as blocks (op-amp, feedback impedance, noise gain) and close the loop
themselves. Time is counted in units of the loop's own period, or their polynomials lose digits.
"""

from __future__ import annotations

from dataclasses import replace
from math import pi, sqrt

import control
import numpy as np
import pytest
from scipy import signal
from scipy.linalg import matrix_balance, solve_continuous_lyapunov

from tests.independent import dense
from tests.independent.adapter import engine_figures
from tests.independent.agreement import distance
from tests.independent.cases import stable_case
from tests.independent.dense import Circuit
from tests.independent.direct import Case

pytestmark = pytest.mark.independent

CASES = 60
DAMPED = 1.0  # deg


def random_cases(seed: int):
    rng = np.random.default_rng(seed)
    return [stable_case(rng, DAMPED) for _ in range(CASES)]


def time_unit(net: Circuit) -> float:
    return 1 / (2 * pi * dense.crossover(net))


def in_units(net: Circuit, unit: float) -> Circuit:
    """The same circuit with time in units: capacitances and time constants shrink alike."""
    names = ("cf", "cin", "cref", "t1", "t2", "t_diode", "t_low_pass", "t_divider")
    return replace(net, **{name: getattr(net, name) / unit for name in names})


def blocks(net: Circuit) -> tuple[control.TransferFunction, ...]:
    """The op-amp, the feedback impedance and the noise gain as transfer functions."""
    gain = control.tf([net.gain0], np.polymul([net.t1, 1], [net.t2, 1]))
    lag = [net.rf * net.cf, 1]
    impedance = control.tf([net.rf], lag)
    noise_gain = control.tf(np.polyadd(lag, [net.rf * net.cin, net.rf * net.leak]), lag)
    return gain, impedance, noise_gain


def closed(net: Circuit) -> control.TransferFunction:
    gain, impedance, noise_gain = blocks(net)
    return impedance * control.feedback(gain / noise_gain, 1)


def low_pass(net: Circuit) -> control.TransferFunction:
    return control.tf([1], [net.t_low_pass, 1])


def without(case: Case) -> Case:
    """The loop alone: no diode pole and no low-pass."""
    return case | {"diode": case["diode"] | {"rise_time": 0.0}, "low_pass": None}


@pytest.mark.parametrize("case", random_cases(11))
def test_phase_margin_is_that_of_python_control(case):
    unit = time_unit(dense.circuit(case))
    gain, _, noise_gain = blocks(in_units(dense.circuit(case), unit))
    _, margin, _, crossover = control.margin(gain / noise_gain)
    assert crossover == pytest.approx(1.0, rel=1e-6)
    found = engine_figures(case)["phase_margin"]
    assert found == pytest.approx(margin, abs=1e-5)


@pytest.mark.parametrize("case", random_cases(12))
def test_bandwidth_is_where_python_control_is_3_db_down_for_the_first_time(case):
    net = dense.circuit(case)
    found = engine_figures(case)["bandwidth"]
    unit = 1 / (2 * pi * found)
    scaled = in_units(net, unit)
    system = closed(scaled) * low_pass(scaled) * control.tf([1], [scaled.t_diode, 1])
    omega = np.append(np.logspace(-4, np.log10(1 - 1e-6), 5000), 1.0)
    level = np.abs(system(1j * omega)) / abs(system.dcgain()) * sqrt(2)
    assert level[-1] == pytest.approx(1.0, abs=1e-6)
    assert (level[:-1] > 1).all()


@pytest.mark.parametrize("case", random_cases(13))
def test_peaking_and_gain_are_those_of_scipy_signal(case):
    net = dense.circuit(case)
    unit = time_unit(net)
    system = closed(in_units(net, unit))
    zeros, poles, gain = signal.tf2zpk(system.num[0][0], system.den[0][0])
    top = dense.resonance(net)[0] * 2 * pi * unit
    omega = top * np.exp(np.linspace(-0.02, 0.02, 4001))
    _, response = signal.freqs_zpk(zeros, poles, gain, worN=omega)
    _, start = signal.freqs_zpk(zeros, poles, gain, worN=[omega[0] * 1e-9])
    found = engine_figures(case)
    assert found["transresistance"] == pytest.approx(abs(start[0]), rel=1e-6)
    peak = max(0.0, 20 * np.log10(np.abs(response).max() / abs(start[0])))
    assert distance("peaking", peak, found["peaking"]) < 1e-6


@pytest.mark.parametrize("case", random_cases(14))
def test_transfer_functions_are_those_of_scipy_signal(case):
    """The dense evaluation's own complex responses, at frequencies from far below to far above."""
    net = dense.circuit(case)
    unit = time_unit(net)
    scaled = in_units(net, unit)
    gain, _, noise_gain = blocks(scaled)
    omega = np.logspace(-6, 4, 200)
    s = 1j * omega
    whole = closed(scaled) * low_pass(scaled)
    voltage = noise_gain * control.feedback(gain / noise_gain, 1)
    pairs = [(whole, scaled.transresistance(s) * scaled.low_pass(s)), (voltage, scaled.from_input(s))]
    for system, expected in pairs:
        _, found = signal.freqresp(signal.TransferFunction(system.num[0][0], system.den[0][0]), omega)
        np.testing.assert_allclose(found, expected, rtol=1e-6)


def stage(constant: float) -> control.StateSpace:
    """A first-order pole in states of its own size: polynomials of several poles would lose digits."""
    return control.ss([[-1 / constant]], [[1 / constant]], [[1.0]], [[0.0]])


def in_states(net: Circuit) -> control.StateSpace:
    """Transresistance and low-pass in states: the loop from stages, the feedback path as it divides."""
    lag = [net.rf * net.cf, 1]
    division = control.tf(lag, np.polyadd(lag, [net.rf * net.cin, net.rf * net.leak]))
    system = net.gain0 * control.ss(division)
    for constant in (net.t1, net.t2):
        system = stage(constant) * system if constant else system
    system = control.feedback(system, 1)
    for constant in (net.rf * net.cf, net.t_low_pass):
        system = stage(constant) * system if constant else system
    return net.rf * system


def lyapunov_power(system: control.StateSpace) -> float:
    """The integral over w of |system|^2, over 2 pi and both signs of w."""
    a, scale = matrix_balance(system.A, permute=False)
    b, c = np.linalg.solve(scale, system.B), system.C @ scale
    gramian = solve_continuous_lyapunov(a, -b @ b.T)
    return float((c @ gramian @ c.T).item())


def test_white_noise_integrals_are_lyapunov_norms():
    """The integral of |H|^2 over frequency is half the squared H2 norm of the states.

    The solver takes poles within six decades without a warning; what lies farther apart is left out.
    """
    compared = 0
    for case in random_cases(15):
        net = dense.circuit(case)
        poles = np.abs(in_states(in_units(net, 1.0)).poles())
        if poles.max() > 1e6 * poles.min():
            continue
        compared += 1
        unit = 1 / poles.min()
        square = lyapunov_power(in_states(in_units(net, unit))) / 2 / unit
        response = dense.squared(net.transresistance, net.low_pass)
        assert dense.integrate(response, dense.break_points(net), 0.0) == pytest.approx(square, rel=1e-8)
    assert compared >= CASES / 2
