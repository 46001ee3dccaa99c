"""Times the core: one log, the search over all logs, and the command from a cold start.

Run it as a script. What is compared runs in turn, so that a busy machine slows both; read the
ratios before the milliseconds. The exit code is 1 when a limit is missed.
"""

import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from time import perf_counter

import numpy as np

from splitcalc.checks import ALL
from splitcalc.logs import search as module
from splitcalc.machine.file import load
from splitcalc.machine.numbers import Numbers
from splitcalc.stress.normal_and_shear import equivalent_stress
from splitcalc.stress.web import web_stress
from splitcalc.thrust.frame import Log, frame_of
from splitcalc.thrust.statics import actions

ROOT = Path(__file__).resolve().parents[2]
DEMO = ROOT / "worksheets" / "machine.toml"
STATIONS = 200
LOG = Log(0.35, 0.03, -0.02, -0.01, 0.06)
ONE_LOG_MS, ONE_LOG_TIMES, SEARCH_MS, CHECK_S, IMPORT_S = 3.0, 3.0, 30.0, 0.8, 0.1


def ours(numbers: Numbers, x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Von Mises stress at all stations and points, and the web's stress at all stations."""
    acting = actions(frame_of(numbers, LOG), x)
    return equivalent_stress(numbers, acting), web_stress(numbers, acting)


def fused(n: Numbers, x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """The same numbers by hand, for an open section without side plates: terms shared, sums as
    matrix products, influence lines as differences of antiderivatives."""
    s, q, F, log = n.section, n.section.points, n.F, LOG
    x = x[:, 0]
    # statics
    x_A = n.x_B - log.l_AB
    x_1, x_2, half = x_A - n.rear_pad, x_A - n.front_pad, n.l_p / 2
    up, side = (log.b_z - log.a_z) / log.l_AB, (log.b_y - log.a_y) / log.l_AB
    Z_1 = -F * (log.a_z - (x_A - x_2) * up) / (x_2 - x_1)
    Y_1 = -F * (log.a_y - (x_A - x_2) * side) / (x_2 - x_1)
    Z_2, Y_2 = -F * up - Z_1, -F * side - Y_1
    K = F * ((n.e + log.a_z - n.z_p) * side - log.a_y * up)
    x_c = (n.x_3 + n.x_4) / 2
    M_yt = F * (n.e + log.b_z) - F * up * (n.x_B - x_c)
    M_zt = F * side * (n.x_B - x_c) - F * log.b_y
    first = np.array([[x_1 - half], [x_2 - half], [n.x_3]])
    last = np.array([[x_1 + half], [x_2 + half], [n.x_4]])
    here = np.minimum(np.maximum(x, first), last)
    rho = (last - here) / (last - first)
    g = rho * ((here + last) / 2 - x)
    mount = (x < n.x_m) * 1.0
    N = F * (rho[2] - mount)
    V_y = np.array([Y_1, Y_2, F * side]) @ rho
    V_z = np.array([Z_1, Z_2, F * up]) @ rho
    M_y = M_yt * rho[2] - F * n.e * mount - np.array([Z_1, Z_2, F * up]) @ g
    M_z = M_zt * rho[2] + np.array([Y_1, Y_2, F * side]) @ g

    def torques(z_o: float, r: float) -> np.ndarray:
        return np.array(
            [
                (1 - r) * K - (n.z_p - z_o) * Y_1,
                r * K - (n.z_p - z_o) * Y_2,
                F * (log.b_y * up - (n.e + log.b_z - z_o) * side),
            ]
        )

    # bimoment: integrals of sinh and cosh over the parts of each load behind and beyond x
    k, L = np.sqrt(n.G * s.J / (n.E * s.C_w)), n.x_end - n.x_start
    T = torques(s.z_s, n.r_2)
    share = T / (last - first)[:, 0]
    b = -(s.z_f - s.z_s) * M_zt / (n.x_4 - n.x_3)
    left, right = k * (here - n.x_start), k * (n.x_end - here)
    from_left, to_right = k * (first - n.x_start), k * (n.x_end - last)
    Q_l = share @ (np.cosh(left) - np.cosh(from_left)) / k
    Q_l += b * (np.sinh(left[2]) - np.sinh(from_left[2]))
    Q_r = share @ (np.cosh(right) - np.cosh(to_right)) / k
    Q_r -= b * (np.sinh(right[2]) - np.sinh(to_right[2]))
    grow, fall, full = k * (x - n.x_start), k * (n.x_end - x), np.sinh(k * L)
    B = -(Q_l * np.sinh(fall) + Q_r * np.sinh(grow)) / (k * full)
    T_w = (Q_r * np.cosh(grow) - Q_l * np.cosh(fall)) / full
    # stresses
    normal = np.stack([N / s.A, M_y / s.I_y, -M_z / s.I_z, B / s.C_w], axis=1)
    sigma = normal @ np.stack([np.ones_like(q.z), q.z, q.y, q.omega])
    flow = np.stack([V_y / s.I_z, V_z / s.I_y, -T_w / s.C_w], axis=1)
    tau = np.abs(flow @ (np.stack([q.Q_z, q.Q_y, q.Q_w]) / q.t))
    tau += np.abs(T @ rho - T_w)[:, None] * (q.t / s.J)
    tau *= tau
    sigma *= sigma
    sigma += 3 * tau
    # the web: every station with the stiffeners on both sides of it
    marks = np.array([n.x_start, *sorted(n.stiffeners), n.x_end])
    span = np.clip(np.searchsorted(marks, x, side="right") - 1, 0, len(marks) - 2)
    start, end = marks[span], marks[span + 1]
    j_l, j_r = np.where(span == 0, -1, 1), np.where(span == len(marks) - 2, -1, 1)
    D = n.E * s.t_w**3 / (12 * (1 - n.nu**2))
    kappa = np.sqrt(3 * D / s.h_o / (n.G * s.b_f * s.t_f**3 / 3))
    a, z, i = (np.minimum(np.maximum(v, start), end) for v in (first, last, here))
    behind, beyond = (
        np.exp(kappa * np.stack([i, a]) - kappa * start),
        np.exp(kappa * end - kappa * np.stack([i, z])),
    )
    P_l = behind[0] + j_l / behind[0] - behind[1] - j_l / behind[1]
    P_r = beyond[0] + j_r / beyond[0] - beyond[1] - j_r / beyond[1]
    at_left, at_right = np.exp(kappa * (x - start)), np.exp(kappa * (end - x))
    whole = np.exp(kappa * (end - start))
    c = P_l * (at_right - j_r / at_right) + P_r * (at_left - j_l / at_left)
    c /= 2 * (last - first) * (whole - j_l * j_r / whole)  # times kappa^2, sign turned
    m_w = np.stack([torques(s.z_f, n.r_2), torques(s.z_f, 0.5)]) @ c
    near = s.t_f + s.r
    on = ((x >= first - near) & (x <= last + near)) * 1.0
    l_w, l_q = n.x_4 - n.x_3 + 2 * near, n.l_p + 2 * near
    M_f = F * (n.e + log.b_z - s.z_t) - F * up * (n.x_B - x_c)
    n_m = (
        on[2] * (F * up / l_w - 12 * M_f * (x - x_c) / l_w**3) + np.array([Z_1, Z_2]) @ on[:2] / l_q
    )
    s_m, s_x = n_m / s.t_w, N / s.A + M_y * s.z_w / s.I_y
    t_x = V_z * s.Q_yw / (s.I_y * s.t_w)
    m = np.abs(m_w).max(axis=0) * (4 / s.t_w**2)  # the stress grows with the moment's size
    square = s_x**2 - s_x * s_m + s_m**2 + 3 * t_x**2
    web = np.sqrt(square + m**2 / 2 + m * np.sqrt((s_m - s_x / 2) ** 2 + m**2 / 4))
    return np.sqrt(sigma), web[:, None]


def milliseconds(ways: dict[str, Callable[[], object]], repeats: int) -> dict[str, float]:
    """Median time of each, taken in turn."""
    times: dict[str, list[float]] = {name: [] for name in ways}
    for _ in range(repeats):
        for name, way in ways.items():
            start = perf_counter()
            way()
            times[name].append(1000 * (perf_counter() - start))
    return {name: float(np.median(ms)) for name, ms in times.items()}


def one_by_one(check, numbers, logs, per_stretch=1, kept=slice(None)):
    """`values_at` as a loop over the logs."""
    shape = np.broadcast_shapes(*(np.shape(getattr(logs, f)) for f in LOG.__dataclass_fields__))
    parts = (np.broadcast_to(getattr(logs, f), shape).ravel() for f in LOG.__dataclass_fields__)
    rows = [
        values_at(check, numbers, Log(*map(float, part)), per_stretch, kept)
        for part in zip(*parts, strict=True)
    ]
    CALLS.append(len(rows))
    return np.stack(rows).reshape(*shape[:-2], *rows[0].shape)


values_at = module.values_at
CALLS: list[int] = []


def searched(numbers: Numbers) -> dict[tuple[str, str], module.Spot]:
    return {
        (check.id, name): spot
        for check in ALL
        for name, spot in module.finish(module.search(check, numbers)).items()
    }


def looped(numbers: Numbers) -> dict[tuple[str, str], module.Spot]:
    module.values_at = one_by_one
    try:
        return searched(numbers)
    finally:
        module.values_at = values_at


def row(name: str, value: str, against: str, limit: str, good: bool) -> bool:
    print(f"{name:46} {value:>10} {against:>22} {limit:>16}  {'ok' if good else 'MISSED'}")
    return good


def cold(*command: str) -> float:
    """Seconds of the quickest of three runs in a new interpreter."""
    times = []
    for _ in range(3):
        start = perf_counter()
        done = subprocess.run(
            [sys.executable, *command], cwd=ROOT, capture_output=True, text=True, check=False
        )
        times.append(perf_counter() - start)
        if done.returncode not in (0, 1):
            raise SystemExit(f"{' '.join(command)} failed:\n{done.stderr}")
    return min(times)


def main() -> int:
    numbers = load(DEMO).numbers()
    x = np.linspace(numbers.x_start, numbers.x_end, STATIONS)[:, None]
    for mine, theirs in zip(ours(numbers, x), fused(numbers, x), strict=True):
        np.testing.assert_allclose(mine, theirs, rtol=1e-12, atol=1e-12 * mine.max())
    good = True

    ms = milliseconds(
        {"ours": lambda: ours(numbers, x), "fused": lambda: fused(numbers, x)}, repeats=200
    )
    times = ms["ours"] / ms["fused"]
    good &= row(
        f"one log, {STATIONS} stations, all stresses", f"{ms['ours']:.2f} ms",
        f"{times:.1f} × fused ({ms['fused']:.2f})", f"{ONE_LOG_MS:.0f} ms, {ONE_LOG_TIMES:.0f} ×",
        ms["ours"] <= ONE_LOG_MS and times <= ONE_LOG_TIMES,
    )  # fmt: skip

    found, slow = searched(numbers), looped(numbers)
    assert found.keys() == slow.keys()
    for key, spot in found.items():
        np.testing.assert_allclose(spot.value, slow[key].value, rtol=1e-12)
        assert spot.log == slow[key].log or np.allclose(
            list(vars(spot.log).values()), list(vars(slow[key].log).values()), rtol=1e-9
        )
    logs = sum(CALLS)
    ms = milliseconds({"search": lambda: searched(numbers)}, repeats=20)
    ms |= milliseconds({"loop": lambda: looped(numbers)}, repeats=1)
    good &= row(
        f"search, {len(ALL)} checks, {logs} logs looked at", f"{ms['search']:.1f} ms",
        f"loop {ms['loop'] / ms['search']:.0f} × slower", f"{SEARCH_MS:.0f} ms",
        ms["search"] <= SEARCH_MS,
    )  # fmt: skip

    bare = cold("-c", "pass")
    imported = cold("-c", "import splitcalc") - bare
    good &= row(
        "import splitcalc, cold", f"{imported:.3f} s", f"Python alone {bare:.3f} s",
        f"{IMPORT_S} s", imported <= IMPORT_S,
    )  # fmt: skip
    if (ROOT / "splitcalc" / "cli.py").exists():
        seconds = cold("-m", "splitcalc.cli", "check", str(DEMO))
        numpy_alone = cold("-c", "import numpy")
        good &= row(
            "splitcalc check of a demo, cold", f"{seconds:.2f} s",
            f"numpy alone {numpy_alone:.2f} s", f"{CHECK_S} s", seconds <= CHECK_S,
        )  # fmt: skip
    else:
        print("splitcalc check: there is no splitcalc/cli.py")
    return 0 if good else 1


if __name__ == "__main__":
    sys.exit(main())
