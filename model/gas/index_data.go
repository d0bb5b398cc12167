package gas

import "barline/model/unit"

const (
	atm      = float64(unit.Atmosphere)
	bar1     = 1e5
	freezing = 273.15
	// borzsonyiT is the reference temperature of borzsonyi-2008. The paper
	// prints 273 K; it is taken to mean the ice point, 0.05 % of density away.
	borzsonyiT = 273.15
)

const (
	citeBorzsonyi  = "A. Borzsonyi et al., Appl. Opt. 47, 4856 (2008), doi:10.1364/AO.47.004856"
	citeBideauMehu = "A. Bideau-Mehu et al., J. Quant. Spectrosc. Radiat. Transfer 25, 395 (1981), doi:10.1016/0022-4073(81)90057-1"
	citeCuthberts1 = "C. and M. Cuthbertson, Proc. R. Soc. A 84, 13 (1910), doi:10.1098/rspa.1910.0052"
	citeCuthberts2 = "C. and M. Cuthbertson, Proc. R. Soc. A 135, 40 (1932), doi:10.1098/rspa.1932.0019"
	citeKoch       = "fit of this project to J. Koch, K. Fysiogr. Sallsk. Lund Forh. 19, 173 (1949), via P. J. Leonard, At. Data Nucl. Data Tables 14, 21 (1974), doi:10.1016/S0092-640X(74)80028-8"
)

// indexTable holds the published formulas. Checked ranges that end at 1100 nm
// were compared up to 1030 nm; dispersion falls smoothly there. The first of each gas is its
// default. Poles are B and C of the forms in index.go, λ in µm.
var indexTable = [...]indexSource{
	{
		name: "piszczatowski-2015", of: helium, form: polarisability,
		constant: 1.38376077, poles: []pole{{1.54294, 2.08}}, tail: 1.42,
		published: nm(200, 2060), checked: nm(200, 2060),
		citation: "series of this project through the ab initio polarisabilities of K. Piszczatowski et al., arXiv:1502.01669 (2015)",
		caution:  "the fourth-order coefficient is from memory",
	},
	{
		name: "mansfield-peck-1969", of: helium, form: refractivity, poles: []pole{{0.01470091, 423.98}},
		t: freezing, p: atm, published: nm(480.1, 2058.6), checked: nm(200, 2060),
		citation: "C. R. Mansfield, E. R. Peck, J. Opt. Soc. Am. 59, 199 (1969), doi:10.1364/JOSA.59.000199",
	},
	{
		name: "cuthbertson-1932", of: helium, form: refractivity, poles: []pole{{0.014755297, 426.29740}},
		t: freezing, p: atm, published: nm(275.3, 546.2), checked: nm(200, 1100), citation: citeCuthberts2,
	},
	{
		name: "ermolov-2015", of: helium, form: sellmeier,
		poles: []pole{{2.16463842e-5, -6.80769781e-4}, {2.10561127e-7, 5.13251289e-3}, {4.75092720e-5, 3.18621354e-3}},
		t:     freezing, p: atm, published: nm(90, 1000), checked: nm(90, 1000),
		citation: "A. Ermolov et al., Phys. Rev. A 92, 033821 (2015), doi:10.1103/PhysRevA.92.033821",
		caution:  "its dispersion lies 8 to 14 % below the ab initio one from 200 to 800 nm",
	},
	{
		name: "borzsonyi-2008", of: helium, form: sellmeier, poles: []pole{{4977.77e-8, 28.54e-6}, {1856.94e-8, 7.760e-3}},
		t: borzsonyiT, p: bar1, published: nm(400, 1000), checked: nm(380, 750), citation: citeBorzsonyi,
		caution: "its dispersion is 19 % high at 260 nm",
	},
	{
		name: "lesiuk-2020", of: neon, form: polarisability, constant: 2.66080, poles: []pole{{2.850, 4.932}}, tail: 4.932 / 2.850,
		published: nm(200, 2060), checked: nm(200, 2060),
		citation: "M. Lesiuk, M. Przybytek, B. Jeziorski, arXiv:2006.15448 (2020); geometric tail of this project",
	},
	{
		name: "cuthbertson-1932", of: neon, form: refractivity, poles: []pole{{0.029073880, 435.71376}},
		t: freezing, p: atm, published: nm(289.4, 546.2), checked: nm(240, 1100), citation: citeCuthberts2,
	},
	{
		name: "borzsonyi-2008", of: neon, form: sellmeier, poles: []pole{{9154.48e-8, 656.97e-6}, {4018.63e-8, 5.728e-3}},
		t: borzsonyiT, p: bar1, published: nm(400, 1000), checked: nm(280, 1100), citation: citeBorzsonyi,
	},
	{
		name: "bideau-mehu-1981", of: neon, form: refractivity, poles: []pole{{0.00128145, 184.661}, {0.0220486, 376.840}},
		t: freezing, p: atm, published: nm(140.4, 546.2), citation: citeBideauMehu,
		caution: "its dispersion is 27 to 30 % above every other source: not recommended",
	},
	{
		name: "peck-fisher-1964", of: argon, form: refractivity, constant: 6.7867e-5, poles: []pole{{3.0182943e-2, 144}},
		t: freezing, p: atm, published: nm(467.9, 2058.7), checked: nm(200, 2060),
		citation: "E. R. Peck, D. J. Fisher, J. Opt. Soc. Am. 54, 1362 (1964), doi:10.1364/JOSA.54.001362",
	},
	{
		name: "bideau-mehu-1981", of: argon, form: refractivity,
		poles: []pole{{2.50141e-3, 91.012}, {5.00283e-4, 87.892}, {5.22343e-2, 214.02}},
		t:     freezing, p: atm, published: nm(140.4, 567.7), checked: nm(140.4, 1100), citation: citeBideauMehu,
	},
	{
		name: "borzsonyi-2008", of: argon, form: sellmeier, poles: []pole{{20332.29e-8, 206.12e-6}, {34458.31e-8, 8.066e-3}},
		t: borzsonyiT, p: bar1, published: nm(400, 1000), checked: nm(250, 1100), citation: citeBorzsonyi,
	},
	{
		name: "lesiuk-2023", of: argon, form: polarisability, constant: 11.0763, poles: []pole{{27.976, 95.02}}, tail: 95.02 / 27.976,
		published: nm(250, 2060), checked: nm(200, 2060),
		citation: "M. Lesiuk, B. Jeziorski, arXiv:2301.12502 (2023); geometric tail of this project",
	},
	{
		name: "cuthbertson-1910", of: argon, form: refractivity, poles: []pole{{0.052476137, 189.24954}},
		t: freezing, p: atm, published: nm(480, 670.8), checked: nm(320, 1100), citation: citeCuthberts1,
	},
	{
		name: "bideau-mehu-1981", of: krypton, form: refractivity,
		poles: []pole{{0.00253637, 65.4742}, {0.00273649, 73.698}, {0.0620802, 181.08}},
		t:     freezing, p: atm, published: nm(140.4, 623.4), checked: nm(140.4, 1100), citation: citeBideauMehu,
	},
	{
		name: "borzsonyi-2008", of: krypton, form: sellmeier, poles: []pole{{26102.88e-8, 2.01e-6}, {56946.82e-8, 10.043e-3}},
		t: borzsonyiT, p: bar1, published: nm(400, 1000), checked: nm(200, 1100), citation: citeBorzsonyi,
	},
	{
		name: "koch-1949", of: krypton, form: refractivity,
		poles: []pole{{0.00253637, 65.4742}, {0.00273649, 73.698}, {0.06345598, 184.0891}},
		t:     freezing, p: atm, published: nm(230, 623.4), checked: nm(220, 1100), citation: citeKoch,
	},
	{
		name: "smith-1976", of: krypton, form: refractivity,
		poles: []pole{{0.00253637, 65.4742}, {0.00273649, 73.698}, {0.06217489, 180.7819}},
		t:     freezing, p: atm, published: nm(164, 623.4), checked: nm(164, 1100),
		citation: "fit of this project to Koch (1949) and P. L. Smith, M. C. E. Huber, W. H. Parkinson, Phys. Rev. A 13, 1422 (1976), doi:10.1103/PhysRevA.13.1422",
	},
	{
		name: "cuthbertson-1910", of: krypton, form: refractivity, poles: []pole{{0.059467251, 142.06205}},
		t: freezing, p: atm, published: nm(480, 670.8), checked: nm(400, 1100), citation: citeCuthberts1,
	},
	{
		name: "koch-1949", of: xenon, form: refractivity, poles: []pole{{0.004993633, 46.301}, {0.07422845, 129.0963}},
		t: freezing, p: atm, published: nm(230, 623.4), checked: nm(230, 1100), citation: citeKoch,
	},
	{
		name: "bideau-mehu-1981", of: xenon, form: refractivity,
		poles: []pole{{0.00322869, 46.301}, {0.00355393, 59.578}, {0.0606764, 112.74}},
		t:     freezing, p: atm, published: nm(140.4, 623.4), checked: nm(140.4, 260), citation: citeBideauMehu,
		caution: "its index is 0.5 to 2 % low; only for below 230 nm",
	},
	{
		name: "borzsonyi-2008", of: xenon, form: sellmeier, poles: []pole{{103701.61e-8, 12.75e-3}, {31228.61e-8, 0.561e-3}},
		t: borzsonyiT, p: bar1, published: nm(400, 1000), checked: nm(300, 1100), citation: citeBorzsonyi,
		caution: "the paper prints 12.75e-6 where only 12.75e-3 disperses",
	},
	{
		name: "cuthbertson-1910", of: xenon, form: refractivity, poles: []pole{{0.068104197, 99.892276}},
		t: freezing, p: atm, published: nm(480, 670.8), checked: nm(450, 1100), citation: citeCuthberts1,
	},
	{
		name: "peck-khanna-1966", of: nitrogen, form: refractivity, constant: 6.8552e-5, poles: []pole{{3.243157e-2, 144}},
		t: freezing, p: atm, published: nm(467.9, 2058.7), checked: nm(200, 2060),
		citation: "E. R. Peck, B. N. Khanna, J. Opt. Soc. Am. 56, 1059 (1966), doi:10.1364/JOSA.56.001059",
	},
	{
		name: "griesmann-burnett-1999", of: nitrogen, form: refractivity,
		poles: []pole{{1.9662731, 22086.66}, {2.7450825e-2, 133.85688}},
		t:     freezing, p: atm, published: nm(145, 270), checked: nm(145, 1100),
		citation: "U. Griesmann, J. H. Burnett, Opt. Lett. 24, 1699 (1999), doi:10.1364/OL.24.001699",
	},
	{
		name: "bates-1984", of: nitrogen, form: refractivity, constant: 5.677465e-5, poles: []pole{{3.1881874e-2, 144}},
		t: 288.15, p: atm, published: nm(254, 468), checked: nm(200, 800),
		citation: "D. R. Bates (1984) as quoted by M. Sneep, W. Ubachs, J. Quant. Spectrosc. Radiat. Transfer 92, 293 (2005)",
	},
	{
		name: "borzsonyi-2008", of: nitrogen, form: sellmeier, poles: []pole{{39209.95e-8, 1146.24e-6}, {18806.48e-8, 13.476e-3}},
		t: borzsonyiT, p: bar1, published: nm(400, 1000), checked: nm(500, 1100), citation: citeBorzsonyi,
		caution: "its dispersion is 28 % high at 260 nm",
	},
	{
		name: "peck-reeder-1972", of: air, form: refractivity, constant: 8.06051e-5,
		poles: []pole{{2.480990e-2, 132.274}, {1.74557e-4, 39.32957}},
		t:     288.15, p: atm, published: nm(185, 1700), checked: nm(230, 1700),
		citation: "E. R. Peck, K. Reeder, J. Opt. Soc. Am. 62, 958 (1972), doi:10.1364/JOSA.62.000958",
	},
	{
		name: "ciddor-1996", of: air, form: refractivity, poles: []pole{{0.05792105, 238.0185}, {0.00167917, 57.362}},
		t: 288.15, p: atm, published: nm(230, 1690), checked: nm(230, 1690),
		citation: "P. E. Ciddor, Appl. Opt. 35, 1566 (1996), doi:10.1364/AO.35.001566",
	},
	{
		name: "borzsonyi-2008", of: air, form: sellmeier, poles: []pole{{14926.44e-8, 19.36e-6}, {41807.57e-8, 7.434e-3}},
		t: borzsonyiT, p: bar1, published: nm(400, 1000), checked: nm(450, 1100), citation: citeBorzsonyi,
	},
}
