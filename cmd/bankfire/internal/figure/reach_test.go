package figure

// reach is the rectangle that a mark covers, for text from base line to cap height.
func (d *drawing) reach(m *mark) box {
	if m.kind == words {
		return d.textBox(m.at[0], m.text, m.hand)
	}
	b := box{m.at[0].x, m.at[0].y, m.at[0].x, m.at[0].y}
	for _, p := range m.at {
		b = box{min(b.x0, p.x), min(b.y0, p.y), max(b.x1, p.x), max(b.y1, p.y)}
	}
	return b.inset(-m.radius)
}

func (d *drawing) textBox(at point, text string, h hand) box {
	w, up := d.fonts.width(text, h), capHeight*h.size
	if h.turned {
		y := at.y + h.anchor*w
		return box{at.x - up, y - w, at.x, y}
	}
	x := at.x - h.anchor*w
	return box{x, at.y - up, x + w, at.y}
}
