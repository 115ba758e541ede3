"""Writes ocean_reference.csv: carbonate chemistry of seawater in 40 digits.

    python3 ocean_reference.py > ocean_reference.csv

Second implementation of the same published constants: every formula typed as
printed, decimal arithmetic, bisection in pH on [2, 12]. Standard library only.
"""
import platform
from decimal import Decimal as D, getcontext

getcontext().prec = 40
LN10 = D(10).ln()


def constants(T, S):
    h, r = T / 100, S.sqrt()
    lnT, logT = T.ln(), T.log10()
    lnK0 = (D("93.4517") * (100 / T) - D("60.2409") + D("23.3585") * h.ln()
            + S * (D("0.023517") - D("0.023656") * h + D("0.0047036") * h ** 2))
    pK1 = D("3633.86") / T - D("61.2172") + D("9.67770") * lnT - D("0.011555") * S + D("0.0001152") * S ** 2
    pK2 = D("471.78") / T + D("25.9290") - D("3.16967") * lnT - D("0.01781") * S + D("0.0001122") * S ** 2
    lnKB = ((D("-8966.90") - D("2890.53") * r - D("77.942") * S + D("1.728") * S * r - D("0.0996") * S ** 2) / T
            + D("148.0248") + D("137.1942") * r + D("1.62142") * S
            + (D("-24.4344") - D("25.085") * r - D("0.2474") * S) * lnT + D("0.053105") * r * T)
    lnKW = (D("-13847.26") / T + D("148.9652") - D("23.6521") * lnT
            + (D("118.67") / T - D("5.977") + D("1.0495") * lnT) * r - D("0.01615") * S)
    calcite = (D("-171.9065") - D("0.077993") * T + D("2839.319") / T + D("71.595") * logT
               + (D("-0.77712") + D("0.0028426") * T + D("178.34") / T) * r
               - D("0.07711") * S + D("0.0041249") * S * r)
    aragonite = (D("-171.945") - D("0.077993") * T + D("2903.293") / T + D("71.595") * logT
                 + (D("-0.068393") + D("0.0017276") * T + D("88.135") / T) * r
                 - D("0.10018") * S + D("0.0059415") * S * r)
    return (lnK0.exp(), D(10) ** -pK1, D(10) ** -pK2, lnKB.exp(), lnKW.exp(), D(10) ** calcite, D(10) ** aragonite)


def state(T, S, dic, alk):
    K0, K1, K2, KB, KW, calcite, aragonite = constants(T, S)
    boron = D("0.000232") / D("10.811") * (S / D("1.80655"))
    calcium = D("0.02128") / D("40.087") * (S / D("1.80655"))

    def species(h):
        den = h * h + K1 * h + K1 * K2
        return dic * h * h / den, dic * K1 * h / den, dic * K1 * K2 / den

    lo, hi = D(2), D(12)
    for _ in range(110):
        ph = (lo + hi) / 2
        h = D(10) ** -ph
        _, hco3, co3 = species(h)
        if hco3 + 2 * co3 + boron * KB / (KB + h) + KW / h - h < alk:
            lo = ph
        else:
            hi = ph
    co2, hco3, co3 = species(h)
    return ph, co2, hco3, co3, co2 / K0, calcium * co3 / calcite, calcium * co3 / aragonite


print("# Carbonate chemistry of seawater in 40 digits: constants and states.")
print("# Weiss 1974, Lueker et al. 2000, Dickson 1990 (total boron Uppstrom 1974), Millero 1995, Mucci 1983, calcium Riley & Tongudai 1967.")
print(f"# python3 ocean_reference.py, Python {platform.python_version()}, module decimal; no seawater-chemistry library was to be had.")
print("# It checks arithmetic and solver of the program, not the digits of the published coefficients.")
print("# K, practical salinity, mol/kg, mol/kg, total scale, mol/kg, mol/kg, mol/kg, atm, 1, 1; constants mol/kg(/atm)")
print("T,S,DIC,ALK,pH,CO2,HCO3,CO3,pCO2,omega_calcite,omega_aragonite,K0,K1,K2,KB,KW,Ksp_calcite,Ksp_aragonite")
for T in ("275.15", "283.15", "288.15", "293.65", "298.15", "308.15", "325.15"):
    for S in ("20", "35", "43"):
        for dic, alk in (("0.0019", "0.0024"), ("0.0020", "0.0023"), ("0.0022", "0.0023"), ("0.0005", "0.0012"),
                         ("0.0050", "0.0050"), ("0.0200", "0.0190"), ("0.1500", "0.1200")):
            args = [D(x) for x in (T, S, dic, alk)]
            row = state(*args) + constants(*args[:2])
            print(",".join([T, S, dic, alk] + [f"{x:.14e}" for x in row]))
