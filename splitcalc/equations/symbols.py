"""The symbol table: what each symbol of an equation means, its unit, and how it is written.

Axes as in EN 1993: x along the beam, y sideways (left), z up, origin on the section's centroid.
"""

from __future__ import annotations

from typing import NamedTuple

from splitcalc.units import Dimension

D = Dimension


class Symbol(NamedTuple):
    words: str
    dimension: D


_GREEK = {
    "alpha": "α",
    "beta": "β",
    "kappa": "κ",
    "nu": "ν",
    "omega": "ω",
    "psi": "ψ",
    "rho": "ρ",
    "sigma": "σ",
    "tau": "τ",
}
_WRITTEN = {"tan_alpha": "tan α", "tan_beta": "tan β"}


def glyph(symbol: str) -> str:
    """The symbol as printed: `sigma_x` as σ_x."""
    if symbol in _WRITTEN:
        return _WRITTEN[symbol]
    head, _, tail = symbol.partition("_")
    return _GREEK.get(head, head) + (f"_{tail}" if tail else "")


def _rows(dimension: D, **words: str) -> dict[str, Symbol]:
    return {name: Symbol(text, dimension) for name, text in words.items()}


SYMBOLS: dict[str, Symbol] = {
    **_rows(
        D.FORCE,
        F="design force of the cylinder",
        N="axial force, tension positive",
        V_y="shear force sideways",
        V_z="shear force up",
        Y="side force of the pad on the beam",
        Y_1="side force of the rear pad on the beam",
        Y_2="side force of the front pad on the beam",
        Z="upward force of the pad on the beam",
        Z_1="upward force of the rear pad on the beam",
        Z_2="upward force of the front pad on the beam",
        Z_L="force of the pad's left corner on the beam",
        Z_R="force of the pad's right corner on the beam",
    ),
    **_rows(
        D.MOMENT,
        D="plate stiffness of the web",
        K="roll couple of the sled on the beam",
        K_i="roll couple at this pad",
        M_y="bending moment about the horizontal axis",
        M_yt="moment of the fixed tool about y, at the middle of its weld and height z_o",
        M_z="bending moment about the vertical axis",
        M_zt="moment of the fixed tool about z, at the middle of its weld",
        T="torque about the shear centre",
        T_1="torque of the rear pad on the beam",
        T_2="torque of the front pad on the beam",
        T_l="torque at the left face",
        T_p="torque of the pad on the beam",
        T_r="torque at the right face",
        T_t="torque of the fixed tool on the beam",
        T_v="torque carried by St Venant torsion",
        T_w="torque carried by warping",
    ),
    **_rows(D.BIMOMENT, B="bimoment", b_t="jump of the bimoment at the fixed tool"),
    **_rows(
        D.STRESS,
        E="modulus of elasticity",
        G="shear modulus",
        f_e="end grain's crushing strength",
        sigma_b="largest stress at the bottom corners",
        sigma_d="size of the normal stress with the distortion allowance",
        sigma_m="membrane stress across the web",
        sigma_max="largest normal stress of the section",
        sigma_q="equivalent stress of the web, plastic across",
        sigma_t="largest stress at the top corners",
        sigma_v="von Mises stress",
        sigma_x="normal stress along the beam",
        tau="shear stress",
        m="cross-bending as a stress, 4·m_w/t_w²",
    ),
    **_rows(D.PRESSURE, p="relief pressure"),
    **_rows(
        D.LENGTH,
        a_y="offset of contact A from the axis, left",
        a_z="offset of contact A from the axis, up",
        b_y="offset of contact B from the axis, left",
        b_z="offset of contact B from the axis, up",
        b_f="width of the loaded flange",
        b_p="width of the push plate",
        c_1="influence of the rear pad's torque",
        c_2="influence of the front pad's torque",
        c_l="influence of the left face's torque",
        c_r="influence of the right face's torque",
        c_t="influence of a torque",
        d_c="bore",
        e="height of the cylinder's axis over the centroid",
        g_1="lever arm of the rear pad, times its share beyond x",
        g_2="lever arm of the front pad, times its share beyond x",
        g_t="lever arm of the fixed tool, times its share beyond x",
        h_a="height of the cylinder's axis over the sliding face",
        h_o="distance of the flanges' mid-lines",
        l_AB="distance of the contact points along the beam",
        l_q="length over which a pad's force enters the web",
        l_s="length of the span",
        l_w="length over which the fixed tool's force enters the web",
        s_c="strip of the push plate's edge where the wood crushes",
        s_l="distance from the span's left end",
        s_min="least strip at the push plate's edge",
        s_r="distance from the span's right end",
        t="wall thickness at the point",
        t_f="thickness of the loaded flange",
        t_w="thickness of the web",
        x="place along the beam",
        x_1="middle of the rear pad",
        x_2="middle of the front pad",
        x_A="face of the moving tool",
        x_B="edge or face of the fixed tool",
        x_c="middle of the fixed tool's root weld",
        y="point's place sideways",
        y_L="place of the left corner's contact",
        y_R="place of the right corner's contact",
        y_b="half width at the bottom",
        y_t="half width at the top",
        z="point's height",
        z_b="height of the bottom fibre",
        z_f="height of the loaded flange's mid-line",
        z_o="height of the line that the torque is about",
        z_p="height of the sled's side contact",
        z_s="height of the shear centre",
        z_t="height of the top fibre",
        z_w="height of the top of the web",
    ),
    **_rows(D.AREA, A="area of the section"),
    **_rows(D.SECTORIAL, omega="warping coordinate of the point"),
    **_rows(
        D.MODULUS,
        Q_y="first moment beyond the point, about y",
        Q_yw="first moment beyond the top of the web",
        Q_z="first moment beyond the point, about z",
    ),
    **_rows(
        D.INERTIA,
        I_y="second moment of area about the horizontal axis",
        I_z="second moment of area about the vertical axis",
        J="St Venant torsion constant",
        J_f="torsion constant of the loaded flange",
        Q_w="sectorial first moment beyond the point",
    ),
    **_rows(D.WARPING, C_w="warping constant"),
    **_rows(D.LINE_FORCE, n_m="force per length that enters the web"),
    **_rows(
        D.LINE_MOMENT,
        k_w="rotational spring of the web per length",
        m_w="plate moment at the top of the web, per length",
    ),
    **_rows(
        D.CURVATURE,
        k="decay constant of the bimoment",
        kappa="decay constant",
        d_b="slope of the influence of the sideways moment",
    ),
    **_rows(D.PER_AREA, psi="flow of a unit torque in the cell"),
    **_rows(D.STRESS_SQUARED, s="membrane part, von Mises stress squared"),
    **_rows(
        D.NUMBER,
        R="decay ratio",
        R_l="decay ratio of the part behind x",
        R_r="decay ratio of the part beyond x",
        c_b="influence of the sideways moment",
        c_d="share of the distortion allowance",
        c_p="design force over relief force",
        d_1="slope of the influence of the rear pad's torque",
        d_2="slope of the influence of the front pad's torque",
        d_l="slope of the influence of the left face's torque",
        d_r="slope of the influence of the right face's torque",
        d_t="slope of the influence of a torque",
        h_l="spread factor of the part behind x",
        h_r="spread factor of the part beyond x",
        i_1="1 at the rear pad, else 0",
        i_2="1 at the front pad, else 0",
        i_t="1 at the fixed tool, else 0",
        j_l="+1 where the left end is zero, −1 where its slope is",
        j_r="+1 where the right end is zero, −1 where its slope is",
        j_s="product of both ends' signs",
        nu="Poisson's ratio",
        r="share of the roll couple at this pad",
        rho_1="share of the rear pad beyond x",
        rho_2="share of the front pad beyond x",
        rho_m="share of the mount beyond x",
        rho_t="share of the fixed tool beyond x",
        tan_alpha="slope of the thrust, up",
        tan_beta="slope of the thrust, left",
        u="decay from the left end",
        v="decay from the right end",
        w_l="share of the load behind x",
        w_r="share of the load beyond x",
    ),
}
