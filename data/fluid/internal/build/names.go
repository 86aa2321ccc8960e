package main

// entry is what the reference tables do not hold: a readable name, other names and
// what to beware of. Names are from memory; the hazards are facts of the trade in own
// words (common practice), one phrase, not a safety data sheet.
type entry struct {
	name, hazard string
	aliases      []string
	note         string
}

const (
	flammableGas    = "extremely flammable gas, heavier than air; the liquefied gas causes cold burns"
	lightFlammable  = "extremely flammable gas; asphyxiant; the cold liquid causes burns"
	flammableLiquid = "highly flammable liquid and vapour; vapour causes drowsiness"
	combustible     = "flammable liquid; harmful if swallowed and drawn into the lungs"
	coldGas         = "asphyxiant in closed rooms; the cold liquid causes burns; trapped liquid bursts vessels"
	refrigerant     = "asphyxiant in closed rooms, heavier than air; heart rhythm disturbed at high dose; forms toxic fumes in a flame"
	mildFlammable   = "mildly flammable gas, heavier than air; forms toxic hydrogen fluoride in a flame"
	fluorocarbon    = "asphyxiant in closed rooms, heavier than air; forms toxic fumes above about 400 degC; strong greenhouse gas"
)

func entries() map[string]entry {
	return map[string]entry{
		"methane":             {"methane", lightFlammable, []string{"R50", "CH4"}, ""},
		"ethane":              {"ethane", flammableGas, []string{"R170", "C2H6"}, ""},
		"propane":             {"propane", flammableGas, []string{"R290", "n-propane", "C3H8"}, ""},
		"n-butane":            {"n-butane", flammableGas, []string{"butane", "R600"}, ""},
		"isobutane":           {"isobutane", flammableGas, []string{"2-methylpropane", "R600a", "i-butane"}, ""},
		"n-pentane":           {"n-pentane", "extremely flammable liquid and vapour; boils near body temperature; vapour causes drowsiness", []string{"pentane", "R601"}, ""},
		"neopentane":          {"neopentane", flammableGas, []string{"2,2-dimethylpropane"}, ""},
		"n-hexane":            {"n-hexane", "highly flammable liquid; damages nerves on long exposure; suspected to impair fertility", []string{"hexane"}, ""},
		"isohexane":           {"isohexane", flammableLiquid, []string{"2-methylpentane", "i-hexane"}, ""},
		"2,3-dimethylbutane":  {"2,3-dimethylbutane", flammableLiquid, []string{"diisopropyl"}, ""},
		"n-heptane":           {"n-heptane", flammableLiquid, []string{"heptane"}, ""},
		"n-octane":            {"n-octane", flammableLiquid, []string{"octane"}, ""},
		"isooctane":           {"isooctane", flammableLiquid, []string{"2,2,4-trimethylpentane", "i-octane"}, ""},
		"n-nonane":            {"n-nonane", combustible, []string{"nonane"}, ""},
		"n-decane":            {"n-decane", combustible, []string{"decane"}, ""},
		"n-undecane":          {"n-undecane", combustible, []string{"undecane"}, ""},
		"n-dodecane":          {"n-dodecane", combustible, []string{"dodecane"}, ""},
		"ethene":              {"ethene", lightFlammable, []string{"ethylene", "R1150", "C2H4"}, ""},
		"propene":             {"propene", flammableGas, []string{"propylene", "R1270"}, ""},
		"1-butene":            {"1-butene", flammableGas, []string{"but-1-ene", "alpha-butylene"}, ""},
		"isobutene":           {"isobutene", flammableGas, []string{"2-methylpropene", "isobutylene", "i-butene"}, ""},
		"1,3-butadiene":       {"1,3-butadiene", "extremely flammable gas; causes cancer; forms explosive peroxides", []string{"buta-1,3-diene", "butadiene", "divinyl"}, ""},
		"1-octene":            {"1-octene", flammableLiquid, []string{"oct-1-ene"}, ""},
		"cyclopropane":        {"cyclopropane", "extremely flammable gas; narcotic", []string{"trimethylene", "RC270"}, "the equation of state starts at 273 K; the boiling temperature comes from another correlation"},
		"cyclopentane":        {"cyclopentane", flammableLiquid, []string{"pentamethylene"}, "the liquid density of this equation is 1 to 3 % below other correlations at Tr 0.9 to 0.96"},
		"cyclohexane":         {"cyclohexane", flammableLiquid, []string{"hexamethylene", "hexahydrobenzene"}, ""},
		"methylcyclopentane":  {"methylcyclopentane", flammableLiquid, []string{"MCP"}, "vapour pressure correlations disagree by up to 2 % at Tr 0.85"},
		"benzene":             {"benzene", "highly flammable liquid; causes cancer; damages blood", []string{"benzol"}, ""},
		"toluene":             {"toluene", "highly flammable liquid; vapour causes drowsiness; suspected to harm the unborn child", []string{"methylbenzene", "toluol"}, ""},
		"ethylbenzene":        {"ethylbenzene", "highly flammable liquid; harmful if inhaled; may damage hearing", []string{"phenylethane"}, ""},
		"hexafluorobenzene":   {"hexafluorobenzene", "highly flammable liquid; irritant", []string{"perfluorobenzene", "C6F6"}, "no surface tension and no density known here"},
		"chlorobenzene":       {"chlorobenzene", "flammable liquid; harmful if inhaled; toxic to water life", []string{"monochlorobenzene", "phenyl chloride"}, ""},
		"methanol":            {"methanol", "highly flammable liquid; toxic if swallowed or inhaled or through skin: blindness", []string{"methyl alcohol", "CH3OH", "MeOH"}, "critical point is the numerical one of the equation of state, whose reducing temperature is 513.38 K; strongly associating"},
		"ethanol":             {"ethanol", "highly flammable liquid; irritates eyes", []string{"ethyl alcohol", "alcohol", "EtOH", "C2H5OH"}, "strongly associating"},
		"1-propanol":          {"1-propanol", "highly flammable liquid; damages eyes", []string{"n-propanol", "propan-1-ol", "n-propyl alcohol"}, "strongly associating"},
		"2-propanol":          {"2-propanol", "highly flammable liquid; irritates eyes; old stock forms peroxides", []string{"isopropanol", "propan-2-ol", "isopropyl alcohol", "IPA"}, "strongly associating"},
		"diethyl-ether":       {"diethyl ether", "extremely flammable liquid; forms explosive peroxides; narcotic", []string{"ether", "ethoxyethane", "ethyl ether"}, ""},
		"dimethyl-ether":      {"dimethyl ether", flammableGas, []string{"methoxymethane", "DME", "RE170"}, ""},
		"acetonitrile":        {"acetonitrile", "highly flammable liquid; harmful: the body makes cyanide of it", []string{"methyl cyanide", "ethanenitrile", "MeCN"}, ""},
		"chloromethane":       {"chloromethane", "extremely flammable gas; damages nerves on long exposure", []string{"methyl chloride", "R40"}, ""},
		"chloroform":          {"chloroform", "toxic if inhaled; narcotic; suspected to cause cancer; forms phosgene in light and air", []string{"trichloromethane", "R20", "CHCl3"}, "vapour pressure correlations disagree by up to 3 % at Tr 0.98"},
		"dichloromethane":     {"dichloromethane", "narcotic; suspected to cause cancer", []string{"methylene chloride", "R30", "CH2Cl2", "DCM"}, "sources give 508 or 510 K and 6350 or 6080 kPa as critical point; vapour pressure correlations disagree by up to 3 % above Tr 0.8"},
		"r-11":                {"trichlorofluoromethane", refrigerant + "; destroys ozone", []string{"R-11", "CFC-11", "freon 11", "fluorotrichloromethane"}, ""},
		"r-12":                {"dichlorodifluoromethane", refrigerant + "; destroys ozone", []string{"R-12", "CFC-12", "freon 12"}, ""},
		"r-22":                {"chlorodifluoromethane", refrigerant + "; destroys ozone", []string{"R-22", "HCFC-22", "freon 22"}, ""},
		"r-32":                {"difluoromethane", mildFlammable, []string{"R-32", "HFC-32", "methylene fluoride"}, ""},
		"r-113":               {"1,1,2-trichloro-1,2,2-trifluoroethane", refrigerant + "; destroys ozone", []string{"R-113", "CFC-113", "freon 113"}, ""},
		"r-114":               {"1,2-dichloro-1,1,2,2-tetrafluoroethane", refrigerant + "; destroys ozone", []string{"R-114", "CFC-114", "freon 114"}, ""},
		"r-123":               {"2,2-dichloro-1,1,1-trifluoroethane", refrigerant + "; may damage the liver", []string{"R-123", "HCFC-123"}, ""},
		"r-125":               {"pentafluoroethane", refrigerant, []string{"R-125", "HFC-125"}, ""},
		"r-134a":              {"1,1,1,2-tetrafluoroethane", refrigerant, []string{"R-134a", "HFC-134a", "norflurane"}, ""},
		"r-1234yf":            {"2,3,3,3-tetrafluoropropene", mildFlammable, []string{"R-1234yf", "HFO-1234yf"}, ""},
		"r-1234ze(e)":         {"trans-1,3,3,3-tetrafluoropropene", mildFlammable, []string{"R-1234ze(E)", "R-1234ze", "HFO-1234ze(E)"}, ""},
		"perfluorobutane":     {"perfluorobutane", fluorocarbon, []string{"decafluorobutane", "n-perfluorobutane", "R-3-1-10", "C4F10"}, "vapour pressure rests on one equation of state"},
		"perfluoropentane":    {"perfluoropentane", fluorocarbon, []string{"dodecafluoropentane", "n-perfluoropentane", "R-4-1-12", "C5F12", "perflenapent"}, "vapour pressure rests on one equation of state"},
		"perfluorohexane":     {"perfluorohexane", fluorocarbon, []string{"tetradecafluorohexane", "n-perfluorohexane", "FC-72", "C6F14"}, "no surface tension known here; other sources give 451 K and 1850 to 1880 kPa as critical point"},
		"water":               {"water", "scalds; superheated water boils explosively", []string{"H2O", "ordinary water", "steam", "R718"}, ""},
		"heavy-water":         {"heavy water", "scalds; superheated water boils explosively", []string{"D2O", "deuterium oxide"}, ""},
		"ammonia":             {"ammonia", "toxic gas; burns skin and eyes; flammable; toxic to water life", []string{"NH3", "R717"}, ""},
		"carbon-dioxide":      {"carbon dioxide", "suffocating and, above some percent in air, toxic; heavier than air; cold burns", []string{"CO2", "R744"}, "no boiling temperature: the triple point lies above 101.325 kPa"},
		"sulfur-dioxide":      {"sulfur dioxide", "toxic gas; burns lungs, skin and eyes", []string{"SO2", "sulphur dioxide", "R764"}, ""},
		"nitrous-oxide":       {"nitrous oxide", "oxidiser: feeds fire, can decompose explosively; narcotic", []string{"N2O", "laughing gas", "dinitrogen monoxide", "R744A"}, ""},
		"hydrogen-sulfide":    {"hydrogen sulfide", "very toxic gas that numbs the sense of smell; extremely flammable", []string{"H2S", "hydrogen sulphide"}, ""},
		"sulfur-hexafluoride": {"sulfur hexafluoride", "asphyxiant, much heavier than air; very strong greenhouse gas", []string{"SF6", "sulphur hexafluoride", "R846"}, "no boiling temperature: the triple point lies above 101.325 kPa"},
		"nitrogen":            {"nitrogen", coldGas, []string{"N2", "R728"}, ""},
		"oxygen":              {"oxygen", "strong oxidiser: feeds fire; the cold liquid causes burns and soaks into fuel explosively", []string{"O2", "R732"}, ""},
		"argon":               {"argon", coldGas, []string{"Ar", "R740"}, ""},
		"xenon":               {"xenon", "asphyxiant in closed rooms; narcotic", []string{"Xe"}, ""},
		"hydrogen":            {"hydrogen", "extremely flammable gas over a wide range; the very cold liquid freezes air", []string{"H2", "normal hydrogen", "R702"}, ""},
		"neon":                {"neon", coldGas, []string{"Ne", "R720"}, "equation of state and older correlations differ in critical temperature (44.4 K against 44.49 K)"},
	}
}

// tensionNotes are remarks on single surface tension fits.
func tensionNotes() map[string]string {
	const year = "the carrier names the 2012 paper; the fit may be from that of 2014"
	return map[string]string{
		"heavy-water":      "range: triple point to Tc, from memory",
		"r-1234ze(e)":      "another carrier has +0.8247 for the second coefficient: 9 % more at 253 K, 1 % at 298 K, nothing above",
		"hydrogen-sulfide": "the VDI Heat Atlas is 15 % lower at Tr 0.6 and 31 % lower at 0.9; the parachor favours neither",
		"isooctane":        year,
		"perfluorobutane":  year,
		"perfluoropentane": year,
		"2-propanol":       "the parachor rises by 11 % from Tr 0.6 to 0.9",
		"n-undecane":       "the parachor falls by 4 to 5 % from Tr 0.6 to 0.9",
		"cyclopentane":     "the parachor falls by 4 to 5 % from Tr 0.6 to 0.9",
		"r-1234yf":         "the parachor falls by 4 to 5 % from Tr 0.6 to 0.9",
	}
}

// heldOut are the fluids of the tables that stay out of the library, kept for trials
// with records that a user writes.
func heldOut() []string {
	return []string{"isopentane", "methylcyclohexane", "r-152a", "1-pentene", "krypton", "acetone"}
}
