Attribute VB_Name = "Module1"
Option Explicit
' Made by xlaxial @VERSION@ for xlwings @XLWINGS@. Changes are lost with the next "xlaxial excel install".
'
' Each worksheet function hands its arguments, and where they stand, to one Python process for all workbooks.
' Over COM a whole number stands for an error value, in both directions; every other number is a Double.

#If Win64 Then
Private Const AX_LIBRARY As String = "@DLL64@"
Private Declare PtrSafe Function XLPyDLLActivateAuto Lib "@DLL64@" (ByRef found As Variant, Optional ByVal config As String = "", Optional ByVal mode As Long = 1) As Long
#Else
Private Const AX_LIBRARY As String = "@DLL32@"
Private Declare PtrSafe Function XLPyDLLActivateAuto Lib "@DLL32@" (ByRef found As Variant, Optional ByVal config As String = "", Optional ByVal mode As Long = 1) As Long
#End If
Private Declare PtrSafe Function LoadLibraryW Lib "kernel32" (ByVal path As LongPtr) As LongPtr

Private Const AX_MODULE As String = "@MODULE@"
Private Const AX_ABOUT_NAME As String = "@SPOKESMAN@"
Private Const AX_PAUSE As Long = 10
Private axKept As Object, axRefused As String, axRefusedAt As Single

@FUNCTIONS@
' ---- the one way to Python

Private Function axCall(ByVal functionName As String, ByVal given As Variant) As Variant
    Dim sent() As Variant, packed As Variant, places As String, count As Long, k As Long, again As Boolean
    On Error GoTo failed
    count = UBound(given) - LBound(given) + 1
    ReDim sent(0 To count)
    For k = 0 To count - 1
        places = places & axTake(sent(k), given(LBound(given) + k)) & vbLf
    Next k
    sent(count) = places
    packed = sent
calling:
    axCall = axAnswer(axServer().CallUDF(AX_MODULE, functionName, (packed)))
    Exit Function
failed:
    If Not axKept Is Nothing And Not again Then
        again = True
        Set axKept = Nothing
        Resume calling
    End If
    If functionName = AX_ABOUT_NAME Then
        axCall = Left$("xlaxial does not run: " & Err.Description, 200) & " - run 'xlaxial excel check' in a terminal"
    Else
        axCall = CVErr(xlErrValue)
    End If
End Function

' A start that failed is not tried again for AX_PAUSE seconds: a sheet of a thousand calls must not wait for each.
Private Function axServer() As Object
    Dim found As Variant
    If axKept Is Nothing Then
        If Len(axRefused) > 0 And Abs(Timer - axRefusedAt) < AX_PAUSE Then Err.Raise 1000, "xlaxial", axRefused
        On Error GoTo refused
        axLoad
        If XLPyDLLActivateAuto(found, axCommand(), 1) <> 0 Then Err.Raise 1000, "xlaxial", CStr(found)
        Set axKept = found
        axRefused = ""
    End If
    Set axServer = axKept
    Exit Function
refused:
    axRefused = Err.Description
    axRefusedAt = Timer
    Err.Raise 1000, "xlaxial", axRefused
End Function

Private Function axSetting(ByVal rowNumber As Long) As String
    axSetting = CStr(ThisWorkbook.Worksheets(1).Cells(rowNumber, 2).Value)
End Function

Private Sub axLoad()
    Dim path As String
    path = axSetting(2) & "\" & AX_LIBRARY
    If LoadLibraryW(StrPtr(path)) = 0 Then Err.Raise 1000, "xlaxial", "cannot load " & path
End Sub

Private Function axCommand() As String
    Dim quote As String
    quote = Chr$(34)
    axCommand = quote & axSetting(1) & quote & " -B -c " & quote & "import sys; sys.path = [p for p in sys.path if p]; " _
        & "from xlaxial.hosts.excel.server import run; run('$(CLSID)')" & quote
End Function

' ---- arguments: the value into "value"; the result is the place of a range (row,column,open ends,sheet), "-" for an
' argument left out, nothing for a value

Private Function axTake(ByRef value As Variant, Optional ByVal given As Variant) As String
    If IsMissing(given) Then
        axTake = "-"
    ElseIf IsObject(given) Then
        If TypeOf given Is Range Then
            axTake = axRange(given, value)
        Else
            value = CVErr(xlErrValue)
        End If
    Else
        value = given
    End If
End Function

Private Function axRange(ByVal given As Range, ByRef value As Variant) As String
    Dim sheet As Worksheet, used As Range, part As Range, ends As Long, height As Long, width As Long
    Set sheet = given.Worksheet
    Set part = given
    If given.Areas.Count > 1 Then
        value = CVErr(xlErrValue)
        Exit Function
    End If
    height = given.Rows.Count
    width = given.Columns.Count
    If given.Row + height - 1 = sheet.Rows.Count And height > 1 Then ends = ends + 1
    If given.Column + width - 1 = sheet.Columns.Count And width > 1 Then ends = ends + 2
    If ends > 0 Then
        Set used = sheet.UsedRange
        If ends <> 2 Then height = axLeast(height, used.Row + used.Rows.Count - given.Row)
        If ends >= 2 Then width = axLeast(width, used.Column + used.Columns.Count - given.Column)
        Set part = given.Resize(height, width)
    End If
    value = axValues(part)
    axRange = given.Row & "," & given.Column & "," & ends & "," & sheet.Name
End Function

Private Function axLeast(ByVal whole As Long, ByVal used As Long) As Long
    axLeast = whole
    If used < whole Then axLeast = used
    If axLeast < 1 Then axLeast = 1
End Function

' A cell in a currency format would come cut to four decimals, a date out of range not at all: Value2 has them whole.
Private Function axValues(ByVal part As Range) As Variant
    Dim found As Variant, exact As Variant, i As Long, j As Long, known As Boolean
    On Error GoTo plain
    found = part.Value
    On Error GoTo 0
    If Not IsArray(found) Then
        If VarType(found) = vbCurrency Then found = part.Value2
    Else
        For j = 1 To UBound(found, 2)
            For i = 1 To UBound(found, 1)
                If VarType(found(i, j)) = vbCurrency Then
                    If Not known Then exact = part.Value2
                    known = True
                    found(i, j) = exact(i, j)
                End If
            Next i
        Next j
    End If
    axValues = found
    Exit Function
plain:
    axValues = part.Value2
End Function

' ---- answers: whole numbers become error values

Private Function axAnswer(ByVal answer As Variant) As Variant
    Dim i As Long, j As Long
    If Not IsArray(answer) Then
        If VarType(answer) = vbLong Then answer = CVErr(answer)
    ElseIf axIsRow(answer) Then
        For j = LBound(answer) To UBound(answer)
            If VarType(answer(j)) = vbLong Then answer(j) = CVErr(answer(j))
        Next j
    Else
        For j = LBound(answer, 2) To UBound(answer, 2)
            For i = LBound(answer, 1) To UBound(answer, 1)
                If VarType(answer(i, j)) = vbLong Then answer(i, j) = CVErr(answer(i, j))
            Next i
        Next j
    End If
    axAnswer = answer
End Function

Private Function axIsRow(ByRef answer As Variant) As Boolean
    Dim upper As Long
    On Error GoTo one
    upper = UBound(answer, 2)
    Exit Function
one:
    axIsRow = True
End Function

' ---- the function wizard: Excel takes help texts from a workbook that shows, so the add-in is none for a moment

Public Sub Auto_Open()
    On Error Resume Next
    Application.OnTime Now, "'" & ThisWorkbook.Name & "'!axDescribe"
End Sub

Public Sub axDescribe()
    Dim updating As Boolean
    updating = Application.ScreenUpdating
    On Error Resume Next
    Application.ScreenUpdating = False
    ThisWorkbook.IsAddin = False
    ThisWorkbook.Windows(1).Visible = True
@DESCRIBE@
    ThisWorkbook.IsAddin = True
    ThisWorkbook.Saved = True
    Application.ScreenUpdating = updating
End Sub

Private Sub axHelp(ByVal functionName As String, ByVal summary As String, Optional ByVal texts As Variant)
    On Error Resume Next
    If IsMissing(texts) Then
        Application.MacroOptions Macro:="'" & ThisWorkbook.Name & "'!" & functionName, Description:=summary, Category:="@CATEGORY@"
    Else
        Application.MacroOptions Macro:="'" & ThisWorkbook.Name & "'!" & functionName, Description:=summary, Category:="@CATEGORY@", ArgumentDescriptions:=texts
    End If
End Sub

@HELP@
