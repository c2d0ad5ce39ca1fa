"""From a call of Calc to a worksheet function and back."""
def dispatcher(config):
    import time
    def run(name, kinds, cell, document, args):
        def t(f, n=20):
            f(); 
            s=time.perf_counter()
            for _ in range(n): r=f()
            return (time.perf_counter()-s)/n*1e6, r
        out=[]
        rg=args[0]
        a=rg.getRangeAddress()
        out.append(("addr", str(a), 0.0))
        data=rg.getDataArray()
        out.append(("data", repr(data[:6])[:600], t(rg.getDataArray)[0]))
        out.append(("types", repr([type(x).__name__ for r in data[:6] for x in r])[:300], 0.0))
        out.append(("getRangeAddress","",t(rg.getRangeAddress)[0]))
        out.append(("sheetname",rg.getSpreadsheet().getName(),t(lambda: rg.getSpreadsheet().getName())[0]))
        tt,r=t(lambda: rg.queryContentCells(2).getRangeAddresses()); out.append(("qDATE",repr([(x.StartColumn,x.StartRow,x.EndColumn,x.EndRow) for x in r])[:300],tt))
        tt,r=t(lambda: rg.queryFormulaCells(1).getRangeAddresses()); out.append(("qFVAL",repr([(x.StartColumn,x.StartRow,x.EndColumn,x.EndRow) for x in r])[:300],tt))
        tt,r=t(lambda: rg.queryFormulaCells(4).getRangeAddresses()); out.append(("qFERR",repr([(x.StartColumn,x.StartRow,x.EndColumn,x.EndRow) for x in r])[:300],tt))
        tt,r=t(lambda: rg.getPropertyValue("NumberFormat")); out.append(("nf",repr(r),tt))
        tt,r=t(lambda: rg.getCellRangeByPosition(0,0,0,a.EndRow-a.StartRow).getPropertyValue("NumberFormat")); out.append(("nfcol",repr(r),tt))
        tt,r=t(lambda: document.NullDate); out.append(("nulldate",str(r.Year),tt))
        tt,r=t(lambda: document.getNumberFormats().getByKey(36).Type); out.append(("type36",str(r),tt))
        def used():
            c=rg.getSpreadsheet().createCursor(); c.gotoEndOfUsedArea(False); return c.getRangeAddress().EndRow
        tt,r=t(used); out.append(("used",str(r),tt))
        for i in range(min(6,len(data))):
            for j in range(min(6,len(data[0]))):
                c=rg.getCellByPosition(j,i)
                out.append((f"cell{i},{j}", f"{c.getType().value} err={c.getError()} nf={c.NumberFormat} type={document.getNumberFormats().getByKey(c.NumberFormat).Type} {c.getString()!r} {c.getFormula()!r}", t(lambda: rg.getCellByPosition(j,i).getError())[0]))
        tt,r=t(lambda: [ (x.RangeAddressesAsString, x.NumberFormat) for x in rg.getUniqueCellFormatRanges()[0:0]] if False else rg.getCellFormatRanges().getCount()); out.append(("fmtranges",repr(r),tt))
        out.append(("others", repr(args[1:]), 0.0))
        return tuple(out)
    return run
