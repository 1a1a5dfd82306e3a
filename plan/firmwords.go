package plan

// Sentence says the firm capacity in words; empty where no well was taken out.
func (f *FirmCapacity) Sentence() string {
	switch {
	case f == nil || f.Well == "":
		return ""
	case f.Total == nil:
		return "Firm capacity: none; with " + f.Well + " out of service no rates keep every limit."
	}
	return "Firm capacity: " + flowText(*f.Total) + ", the largest total with " + f.Well + " out of service, the well whose loss costs the most; with every well in service " + flowText(f.AllInService) + "."
}
