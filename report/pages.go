package report

// pages are all pages of a report in their order.
func pages(d *Data, s Style) []page {
	return []page{
		summaryPage(d, s),
		responsesPage(d, s),
		risePage(d, s),
		distancePage(d, s),
		impulsePage(d, s),
		patternPage(d, s),
		trustPage(d, s),
		holdPage(d, s),
		takesPage(d, s),
	}
}
